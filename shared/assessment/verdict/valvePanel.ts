/**
 * The valve tests on one hunting stretch, each with its domain: what it found, what it says, or why it was withheld. No single test
 * decides; the verdict weighs their values with the other evidence.
 */
import { isInsufficient, type Insufficient, type LoopType, type ValveTest } from '../types'
import { bandPass } from '../spectrum/bandPass'
import { apparentStiction, type ApparentStiction } from '../valve/apparentStiction'
import { crossCorrelationTest } from '../valve/crossCorrelationTest'
import { deadBandSlipJump } from '../valve/deadBandSlipJump'
import { halfCycleShape } from '../valve/halfCycleShape'
import { peakAsymmetry } from '../valve/peakAsymmetry'
import { stickAndJump } from '../valve/stickAndJump'
import { stickSlipPatterns } from '../valve/stickSlipPatterns'
import { averageDown } from '../valve/averageDown'
import type { SlipEvents } from './slipEvents'
import type { StandsAndJumps } from './standsAndJumps'
import type { StickFit } from './stickFit'

export interface ValvePanel {
  tests: ValveTest[]
  values: { halfCycleShape: number, peakAsymmetry: number, standingTravel: number, jumpShare: number, stickSlip: number, lagAsymmetry: number }
  stiction: ApparentStiction | Insufficient
}

interface Row { name: string, source: string, domain: string, threshold: string }
const ROWS = {
  horch: { name: 'Cross-correlation of OP and PV', source: 'Horch 1999', domain: 'Oscillating self-regulating loop under PI control', threshold: 'odd about lag 0: sticking; even: sound' },
  shape: { name: 'Shape of the half-cycles', source: 'He, Wang, Pottmann, Qin 2007', domain: 'Oscillating loop; OP where the process settles by itself, PV where it integrates', threshold: '0.6 or more: triangular; 0.4 or less: sine' },
  asymmetry: { name: 'Asymmetry of the peaks', source: 'Singhal, Salsbury 2005', domain: 'Oscillating self-regulating loop', threshold: 'clearly above 1: sticking (limit 1.5, ours)' },
  patterns: { name: 'Stick-slip patterns of OP and PV', source: 'Yamashita 2006, with equiprobable symbols', domain: 'PV follows the valve without much lag (flow, fast pressure)', threshold: 'above 0.25: sticking' },
  jump: { name: 'Stand and jump', source: 'Ours, after Choudhury, Thornhill, Shah 2005', domain: 'PV follows the valve within a fraction of the period', threshold: 'both shares above 0.55: sticking' },
  slip: { name: 'Slips across the set point', source: 'Ours, after Choudhury, Thornhill, Shah 2005', domain: 'PV follows the valve within a few samples; long half-cycles', threshold: '2 or more, in at least 30 % of the long half-cycles (ours)' },
  strokes: { name: 'Single strokes', source: 'Ours, after Choudhury, Thornhill, Shah 2005', domain: 'Short records; OP moving', threshold: '2 or more, in at least 30 % of the jumps (ours)' },
  fit: { name: 'Fit of a sticking stem', source: 'After Srinivasan and others 2005; He and others 2007', domain: 'Automatic mode, OP moving', threshold: 'explains at least 5 % more of PV than a sound stem, and half of it (ours)' },
  band: { name: 'Dead band and slip', source: 'Ours, after Choudhury, Thornhill, Shah 2005', domain: 'Signs of sticking; PV follows the valve quickly', threshold: 'a size, no limit' },
} satisfies Record<string, Row>

/**
 * @param pv deviation of PV on the hunting stretch, finite, length n
 * @param op same length
 * @param period samples; null: no regular oscillation was found
 * @param strokes null where the record is not short: then the test is not in the list
 * @param withheld a reason that silences the whole panel (compressed, too slow, on-off), or null
 */
export function valvePanel(pv: Float64Array | null, op: Float64Array | null, period: number | null, type: LoopType, opSpan: number, fit: StickFit | null, slip: SlipEvents | null, strokes: { found: StandsAndJumps, bends: boolean } | null, withheld: string | null): ValvePanel {
  const tests: ValveTest[] = []
  const values = { halfCycleShape: NaN, peakAsymmetry: NaN, standingTravel: NaN, jumpShare: NaN, stickSlip: NaN, lagAsymmetry: NaN }
  const silence = withheld ?? (!op ? 'The record has no OP.' : !pv || pv.length < 64 ? 'Too few samples in automatic.' : null)
  const add = (row: Row, value: number | null, says: ValveTest['says'], note: string) => tests.push({ ...row, value: value === null || !Number.isFinite(value) ? null : Number(value.toPrecision(4)), says, note })
  let stiction: ApparentStiction | Insufficient = { status: 'insufficient', reason: silence ?? 'No oscillation was found.' }
  if (silence || !pv || !op) {
    for (const row of Object.values(ROWS)) if (row !== ROWS.strokes) add(row, null, 'withheld', silence ?? '')
    return { tests, values, stiction }
  }
  const integrating = type === 'level'
  const rhythm = period === null ? 'No oscillation was found.' : period < 8 ? `Only ${period.toFixed(1)} samples a period; 8 are needed.` : null
  const run = <T extends object>(row: Row, gate: string | null, test: () => T | Insufficient, say: (r: T) => [number, ValveTest['says'], string]) => {
    if (gate) return add(row, null, 'withheld', gate)
    const r = test()
    if (isInsufficient(r)) return add(row, null, 'withheld', `${r.reason.charAt(0).toUpperCase()}${r.reason.slice(1)}.`)
    const [value, says, note] = say(r as T)
    add(row, value, says, note)
  }

  let y = pv
  let u = op
  if (!rhythm && period !== null) {
    const band = { sampleIntervalS: 1, lowHz: 0.5 / period, highHz: Math.min(0.5, 7 / period) }
    y = bandPass(pv, band)
    u = bandPass(op, band)
  }
  const settles = integrating ? 'Level loops mostly integrate; the test does not hold there.' : null
  run(ROWS.horch, rhythm ?? settles, () => crossCorrelationTest(u, y, Math.min(u.length - 1, Math.ceil(period!))), (r) => {
    values.lagAsymmetry = r.lagAsymmetry
    return [r.lagAsymmetry, r.says, 'Often undecided: in closed loop the phase also depends on period and integral time.']
  })
  run(ROWS.shape, rhythm, () => halfCycleShape(integrating ? y : u), (r) => {
    values.halfCycleShape = r.index
    return [r.index, r.index >= 0.6 ? 'sticking' : r.index <= 0.4 ? 'sound' : 'undecided', `Over ${r.halfCycles} half-cycles of ${integrating ? 'PV' : 'OP'}.`]
  })
  run(ROWS.asymmetry, rhythm ?? settles, () => peakAsymmetry(y), (r) => {
    values.peakAsymmetry = r.median
    return [r.median, r.median > 1.5 ? 'sticking' : 'undecided', `Median over ${r.halfCycles} half-cycles.`]
  })
  run(ROWS.patterns, rhythm ?? settles, () => {
    const factor = Math.max(1, Math.round(period! / 24))
    return stickSlipPatterns(averageDown(op, factor), averageDown(pv, factor))
  }, (r) => {
    values.stickSlip = r.index1
    return [r.index1, r.index1 > 0.25 && r.index3 > 0.25 ? 'sticking' : 'undecided', `${r.moves} moves looked at.`]
  })
  run(ROWS.jump, null, () => stickAndJump(op, pv), (r) => {
    values.standingTravel = r.standingTravel
    values.jumpShare = r.jumpShare
    return [r.standingTravel, r.says, `${percent(r.standingTravel)} of the output's travel was made while PV stood; ${percent(r.jumpShare)} of PV's travel in its fastest fifth.`]
  })
  run(ROWS.slip, !slip || slip.looked < 2 ? 'Fewer than two half-cycles are long and large enough.' : null, () => slip!, (r) => {
    const share = r.slips / r.looked
    return [share, r.slips >= 2 && share >= 0.3 ? 'sticking' : 'undecided', `${r.slips} of ${r.looked} long half-cycles end in a jump that the output had asked for.`]
  })
  if (strokes) {
    run(ROWS.strokes, strokes.found.looked === 0 ? `PV made no ${strokes.bends ? 'bend' : 'jump'} that stands out of noise and upsets.` : null, () => strokes.found, (r) => {
      const share = r.slips / r.looked
      return [r.slips, r.slips >= 2 && share >= 0.3 ? 'sticking' : 'undecided', `${r.slips} of ${r.looked} ${strokes.bends ? 'bends of PV came after a straight run' : 'jumps of PV came after a stand'} against which OP had moved on.`]
    })
  }
  run(ROWS.fit, fit ? null : 'Too few samples, or OP stood still.', () => fit!, f => [f.explained - f.linear, f.explained - f.linear > 0.05 && f.explained > 0.5 ? 'sticking' : 'undecided',
    `A sticking stem explains ${percent(f.explained)} of PV's movement, a sound one ${percent(f.linear)}.`])
  run(ROWS.band, rhythm, () => deadBandSlipJump(op, pv), r => [(100 * r.stickBand) / opSpan, 'undecided', `OP travels ${((100 * r.stickBand) / opSpan).toPrecision(2)} % of span after a turn until PV answers; an upper bound.`])
  if (!rhythm && period !== null) stiction = apparentStiction(op, pv, { periodSamples: period, opSpan })
  return { tests, values, stiction }
}

const percent = (x: number): string => `${Math.round(100 * x)} %`
