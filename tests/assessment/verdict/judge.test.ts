import { describe, expect, it } from 'vitest'
import { buildLedger } from '../../../shared/assessment/ledger/buildLedger'
import { prepareRecord } from '../../../shared/assessment/preparation/prepareRecord'
import { VERDICTS, type TimeSpan } from '../../../shared/assessment/types'
import { EVIDENCE_TEXTS } from '../../../shared/assessment/verdict/evidenceTexts'
import { FEATURES, type FeatureValues } from '../../../shared/assessment/verdict/gatherFeatures'
import { judge, type Facts } from '../../../shared/assessment/verdict/judge'
import { binOf, LIKELIHOODS, posteriorOf, type LikelihoodTable } from '../../../shared/assessment/verdict/likelihoods'
import { NEXT_ACTIONS } from '../../../shared/assessment/verdict/nextActions'
import { weekFrame } from '../../../shared/assessment/week/isoWeek'
import { makeRecord, makeSetup } from '../records'

const nothing = () => Object.fromEntries(FEATURES.map(f => [f, NaN])) as FeatureValues
/** Two causes, one figure: in bin 1 the second cause is e^2 times likelier than the first. */
const table: LikelihoodTable = {
  training: { command: 'by hand', firstSeed: 0, loops: 0, heldOut: 0 }, classes: ['steady', 'huntingValve'], base: [0, 0], temperature: 1,
  features: [{ name: 'kurtosis', edges: [2], weights: [[0, 2], [0, -2], [0, 0]], counts: [[0, 0], [0, 0], [0, 0]] }],
}

describe('likelihoods', () => {
  it('puts a value into its bin: edges belong to the bin above, what is not there to the last', () => {
    expect([-1, 0, 0.5, 1, 9, NaN].map(x => binOf([0, 1], x))).toEqual([0, 1, 1, 2, 2, 3])
    expect(binOf([], 5)).toBe(0)
    expect(binOf([], NaN)).toBe(1)
  })

  it('is the softmax of the sums, with a little left for the others', () => {
    // closed form: odds e^2, then 3 % floor shared out: p = 0.03 + (e^2 / (1 + e^2)) (0.97 - 0.03)
    const p = posteriorOf({ ...nothing(), kurtosis: 1 }, table).probability
    expect(p[1]).toBeCloseTo(0.03 + 0.94 * Math.exp(2) / (1 + Math.exp(2)), 12)
    expect(p[0] + p[1]).toBeCloseTo(1, 12)
    expect(posteriorOf(nothing(), table).probability).toEqual([0.5, 0.5])
    expect(posteriorOf({ ...nothing(), kurtosis: 1 }, { ...table, temperature: 2 }).probability[1]).toBeCloseTo(0.03 + 0.94 * Math.exp(1) / (1 + Math.exp(1)), 12)
  })

  it('ships a whole table: every figure, weights and counts for each bin and cause', () => {
    expect(LIKELIHOODS.features.map(f => f.name)).toEqual([...FEATURES])
    for (const f of LIKELIHOODS.features) {
      expect(f.weights).toHaveLength(f.edges.length + 2)
      expect(f.counts).toHaveLength(f.edges.length + 2)
      for (const row of [...f.weights, ...f.counts]) expect(row).toHaveLength(LIKELIHOODS.classes.length)
      expect([...f.edges].sort((a, b) => a - b)).toEqual(f.edges)
      // each loop of the fit falls into one bin of each figure
      expect(f.counts.flat().reduce((a, b) => a + b, 0)).toBe(LIKELIHOODS.training.loops)
    }
    expect(LIKELIHOODS.training.loops).toBeGreaterThan(1000)
  })
})

const week = weekFrame('2026-W48', 'UTC')
const start = week.hourEdges[0]
/** Two days at a minute; manual, limits and hunting by hour. */
function facts(change: Partial<Facts> & { manual?: number, limit?: number, hunting?: number, off?: number, hours?: number } = {}): Facts {
  const hours = change.hours ?? 48
  const h = (i: number) => Math.floor(i / 60)
  const setup = change.setup ?? makeSetup()
  const prepared = prepareRecord(makeRecord({
    fromMs: start, intervalS: 60, n: hours * 60, pv: i => h(i) >= hours - (change.off ?? 0) ? 55 : 50,
    mode: i => h(i) < (change.manual ?? 0) ? 'MAN' : 'AUTO', op: i => h(i) >= (change.manual ?? 0) && h(i) < (change.manual ?? 0) + (change.limit ?? 0) ? 100 : 40,
  }), setup, week)
  const from = (change.manual ?? 0) + (change.limit ?? 0)
  const episodes: TimeSpan[] = change.hunting ? [{ fromMs: start + from * 3_600_000, toMs: start + (from + change.hunting) * 3_600_000 }] : []
  return {
    setup, prepared, ledger: buildLedger(prepared, setup.tolerance, week, episodes, []), features: nothing(),
    oscillations: change.hunting ? [{ periodS: 600, periodSdS: 1, amplitude: 3, regularity: 5, decay: 0.9, strength: 0.9, episodes }] : [],
    meaningful: 0.5, compression: null, tooSlow: null, tooShort: null, timeInTolerance: 1, ...change,
  }
}

describe('judge', () => {
  it('has a sentence for every verdict and role, and for every figure', () => {
    for (const v of VERDICTS) for (const text of Object.values(NEXT_ACTIONS[v])) expect(text).toMatch(/^[A-Z].{8,160}\.$/)
    for (const f of FEATURES) {
      expect(EVIDENCE_TEXTS[f].text(0.4)).toMatch(/^[A-Z0-9-].*\.$/)
      expect(EVIDENCE_TEXTS[f].source.length).toBeGreaterThan(3)
    }
  })

  it('says no data first', () => {
    const j = judge(facts({ hours: 0 }))
    expect([j.verdict, j.verdictReason]).toEqual(['cannotTell', 'There is no sample in this week.'])
  })

  it('counts manual and limits before any inference, the larger first', () => {
    const j = judge(facts({ manual: 20, limit: 10 }))
    expect([j.verdict, j.confidence]).toEqual(['manual', 0.97])
    expect(j.findings.map(f => [f.verdict, f.hours]).slice(0, 2)).toEqual([['manual', 20], ['saturated', 10]])
    expect(judge(facts({ manual: 8, limit: 12 })).verdict).toBe('saturated')
  })

  it('makes no verdict of an hour in manual', () => {
    expect(judge(facts({ manual: 1 })).verdict).not.toBe('manual')
    expect(judge(facts({ manual: 2, hours: 2 })).verdict).toBe('manual')
  })

  it('gives the reason where the data cannot carry a cause', () => {
    for (const reason of ['The historian has thinned the record.', 'The loop swings every 3 samples.']) {
      const j = judge(facts({ hunting: 30, ...(reason.includes('thinned') ? { compression: reason } : { tooSlow: reason }) }))
      expect([j.verdict, j.verdictReason, j.valveLikely]).toEqual(['cannotTell', reason, false])
      expect(j.findings.find(f => f.verdict === 'cannotTell')!.reason).toBe(reason)
    }
    expect(judge(facts({ tooShort: 'Too short.' })).verdict).toBe('cannotTell')
    // each finding stands once
    const both = judge(facts({ manual: 40, limit: 5, compression: 'The historian has thinned the record.' })).findings.map(f => f.verdict)
    expect(new Set(both).size).toBe(both.length)
    // a thinned record still shows that the loop stood in manual
    expect(judge(facts({ manual: 40, compression: 'The historian has thinned the record.' })).verdict).toBe('manual')
  })

  it('names no hunting cause without OP', () => {
    const f = facts({ hunting: 40 })
    const j = judge({ ...f, prepared: { ...f.prepared, op: null } })
    expect(['cannotTell', 'steady']).toContain(j.verdict)
  })

  it('never accuses the valve of an on-off loop', () => {
    const j = judge(facts({ setup: makeSetup('temperature', { form: 'onOff' }), hunting: 40 }))
    expect([j.verdict, j.findings.some(f => f.verdict === 'huntingValve')]).toEqual(['huntingTuning', false])
  })

  it('gives each item of evidence a side that fits its weight', () => {
    const j = judge(facts({ hunting: 40, features: { ...nothing(), amplitudeVariation: 0.05, phaseWander: 0.01, regularity: 3, kurtosis: 1.5, huntingShare: 1, strength: 0.97 } }))
    const items = j.findings.flatMap(f => f.evidence)
    expect(items.length).toBeGreaterThan(0)
    for (const e of items) expect(e.says).toBe(e.weight > 0.1 ? 'for' : e.weight < -0.1 ? 'against' : 'silent')
  })
})
