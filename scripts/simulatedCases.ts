/**
 * Runs simulated loops through the assessment in two processes and gives back what calibration and accuracy need. A case is a cause, a
 * loop type and a seed; the same case gives the same loop. Used by calibrate.ts and accuracy.ts; not a command of its own.
 */
import { fork } from 'node:child_process'
import { fileURLToPath } from 'node:url'
import { assessLoopWeek } from '../shared/assessment/assessLoopWeek'
import { drawScenario } from '../shared/assessment/simulation/drawScenario'
import { drawShortWindow, type WindowCondition } from '../shared/assessment/simulation/drawShortWindow'
import { simulateLoop } from '../shared/assessment/simulation/simulateLoop'
import type { Cause, LoopTruth } from '../shared/assessment/simulation/scenario'
import { seededRandom } from '../shared/assessment/statistics/seededRandom'
import type { LedgerState, LoopRecord, LoopType, Verdict } from '../shared/assessment/types'
import { weekFrame } from '../shared/assessment/week/isoWeek'

export const LOOP_TYPES: LoopType[] = ['flow', 'pressure', 'level', 'temperature', 'analysis', 'other']

/** `crop`: only a few cycles, or a short piece, of the record; training only. `window`: one of the short windows instead, `cause` is then only a heading */
export interface Case { cause: Cause, type: LoopType, seed: number, crop?: boolean, window?: WindowCondition }
export interface CaseResult extends Case {
  truth: Verdict
  /** cause beneath a record that is too slow or compressed */
  hidden: string | null
  verdict: Verdict
  confidence: number
  reason: string
  findings: { verdict: Verdict, confidence: number, hours: number }[]
  hours: Record<LedgerState, number>
  features: Record<string, number>
  /** set-up details left out, as on a site where the tuning was never written down */
  withoutTuning: boolean
  /** short windows: times the stem broke loose */
  slips?: number
}

/** Quick loops show in a day or two what slow ones show in a week. */
const DAYS: Record<LoopType, number> = { flow: 1, pressure: 2, other: 2, level: 7, temperature: 7, analysis: 7 }
const QUICK: LoopType[] = ['flow', 'pressure', 'other']

/** Half of the records are long and sampled as is usual for the type, a quarter are short, a quarter coarse. */
function optionsOf(type: LoopType, seed: number): { days: number, intervalS?: number } {
  const quick = QUICK.includes(type)
  if (seed % 4 === 1) return { days: quick ? 0.15 : 2 }
  if (seed % 4 === 2) return { days: DAYS[type], intervalS: quick ? 10 : 60 }
  return { days: DAYS[type] }
}
const WEEK = weekFrame('2026-W48', 'UTC')

/** null: the draw did not come out visible, which the simulator says. */
export function runCase({ cause, type, seed, crop, window }: Case): CaseResult | null {
  if (window) return runWindow(window, type, seed)
  // some causes do not show in a short or coarse record of some types: then the usual one
  const drawn = drawOrNull(cause, type, seed, optionsOf(type, seed)) ?? drawOrNull(cause, type, seed, { days: DAYS[type] })
  if (!drawn) return null
  const simulated = simulateLoop(drawn.setup, drawn.scenario)
  const record = crop ? cropped(simulated.record, drawn.truth, seed) : simulated.record
  // one site in three has no tuning on record
  const withoutTuning = seed % 3 === 0
  const setup = withoutTuning ? { ...drawn.setup, gain: null, integralTimeS: null, derivativeTimeS: null, filterTimeS: null } : drawn.setup
  let features: Record<string, number> = {}
  const a = assessLoopWeek(record, setup, WEEK, [], { features: (v) => { features = v } })
  return {
    cause, type, seed, truth: drawn.truth.verdict, hidden: drawn.truth.facts.hidden === undefined ? null : String(drawn.truth.facts.hidden),
    verdict: a.verdict, confidence: a.confidence, reason: a.verdictReason, findings: a.findings.map(f => ({ verdict: f.verdict, confidence: f.confidence, hours: f.hours })),
    hours: a.hours, features, withoutTuning,
  }
}

function runWindow(window: WindowCondition, type: LoopType, seed: number): CaseResult {
  const { setup: drawn, record, truth } = drawShortWindow(window, type, seed)
  const withoutTuning = seed % 2 === 0
  const setup = withoutTuning ? { ...drawn, deadTimeS: null, gain: null, integralTimeS: null, derivativeTimeS: null, filterTimeS: null } : drawn
  let features: Record<string, number> = {}
  const a = assessLoopWeek(record, setup, WEEK, [], { features: (v) => { features = v } })
  return {
    cause: truth.verdict === 'huntingValve' ? 'stickingValve' : 'healthy', window, type, seed, truth: truth.verdict, hidden: null, slips: truth.slips,
    verdict: a.verdict, confidence: a.confidence, reason: a.verdictReason, findings: a.findings.map(f => ({ verdict: f.verdict, confidence: f.confidence, hours: f.hours })),
    hours: a.hours, features, withoutTuning,
  }
}

function drawOrNull(cause: Cause, type: LoopType, seed: number, options: { days: number, intervalS?: number }) {
  try {
    return drawScenario(cause, type, seed, { ...options, startMs: WEEK.hourEdges[0] })
  }
  catch (error) {
    if (error instanceof RangeError && /came out visible/.test(error.message)) return null
    throw error
  }
}

/**
 * A piece inside the time in which the cause acts: 2.5 to 8 cycles where it hunts, else 2 to 20 % of the record; 150 samples at least. A week of
 * fifty cycles and more is not all that people upload.
 */
function cropped(record: LoopRecord, truth: LoopTruth, seed: number): LoopRecord {
  const random = seededRandom(seed ^ 0x2545f491)
  const n = record.t.length
  const interval = (record.t[n - 1] - record.t[0]) / (n - 1)
  const period = Number(truth.facts.periodS) * 1000
  const wish = period > 0 ? period * (2.5 + 5.5 * random.uniform()) / interval : n * 0.02 * 10 ** random.uniform()
  const length = Math.min(n, Math.max(150, Math.round(wish)))
  const span = truth.spans[0] ?? { fromMs: record.t[0], toMs: record.t[n - 1] }
  const first = Math.max(0, Math.round((span.fromMs - record.t[0]) / interval))
  const last = Math.min(n, Math.round((span.toMs - record.t[0]) / interval))
  const from = Math.max(0, Math.min(n - length, first + Math.floor(random.uniform() * Math.max(1, last - first - length))))
  const part = (a: Float64Array | null) => a && a.slice(from, from + length)
  return { ...record, t: part(record.t)!, pv: part(record.pv)!, sp: part(record.sp), op: part(record.op), mode: record.mode && record.mode.slice(from, from + length) }
}

/** All cases over `workers` processes, in the order given; cases that did not come out are left out. */
export async function runCases(cases: Case[], workers = 2, log: (done: number) => void = () => {}): Promise<CaseResult[]> {
  const results = new Array<CaseResult | null>(cases.length).fill(null)
  let next = 0
  let done = 0
  await Promise.all(Array.from({ length: workers }, () => new Promise<void>((resolve, reject) => {
    const child = fork(fileURLToPath(import.meta.url), ['--cases'], { execArgv: ['--import', 'tsx'], serialization: 'advanced' })
    const give = () => {
      if (next >= cases.length) {
        child.send({ from: 0, cases: [] })
        return
      }
      const from = next
      next = Math.min(cases.length, next + 8)
      child.send({ from, cases: cases.slice(from, next) })
    }
    child.on('message', (message: { from: number, results: (CaseResult | null)[], error?: string }) => {
      if (message.error) return reject(new Error(message.error))
      message.results.forEach((r, i) => { results[message.from + i] = r })
      done += message.results.length
      log(done)
      give()
    })
    child.on('exit', code => (code === 0 ? resolve() : reject(new Error(`worker ended with code ${code}`))))
    give()
  })))
  return results.filter((r): r is CaseResult => r !== null)
}

if (process.argv[2] === '--cases' && process.send) {
  process.on('message', (message: { from: number, cases: Case[] }) => {
    if (!message.cases.length) process.exit(0)
    try {
      process.send!({ from: message.from, results: message.cases.map(runCase) })
    }
    catch (error) {
      process.send!({ from: message.from, results: [], error: String((error as Error).stack) })
    }
  })
}
