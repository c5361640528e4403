import { compareModels, type ModelComparison } from '../../../shared/control/identification/compareModels'
import type { FitStretch, InsufficientFit, ModelFit } from '../../../shared/control/identification/fitModel'
import type { PreparedRecord } from '../../../shared/assessment/preparation/prepareRecord'
import type { LoopRecord, LoopSetup, TimeSpan } from '../../../shared/assessment/types'
import type { ProcessModel } from '../../../shared/control/types'
import type { Comparison, FitView, ModelAnswer, StretchView } from '../../../shared/types/tuning'
import { findStretches, preparedBetween, type Stretch } from './findStretches'

/** What is fitted on its own; more than an engineer compares at a glance. */
const MOST_FITTED = 6
const MOST_SAMPLES_OF_A_FIT = 1200
const DRAWN = 240

const METHOD = 'Prediction-error least squares: output error with an autoregressive noise model, 95 % intervals by the larger of Fisher information and jackknife; first order, second order and integrating models compared by the criteria of Schwarz and Akaike. PV and OP are averaged over the same short blocks where a stretch has more than 1200 samples.'
const SOURCE = 'L. Ljung (1999), System Identification, 2nd ed., ch. 7, 9, 13; G. Schwarz (1978); H. Akaike (1974). Noise of PV: T. Gasser, L. Sroka, C. Jennen-Steinmetz (1986), Biometrika 73:625-633.'

/**
 * Finds the usable stretches of a record, fits each on its own and the chosen ones together.
 * Cost: about a second of one core for a stretch of 1200 samples, so never in a thread that serves requests.
 * @param chosen begin and end of the stretches to fit together; null: those that carry a model on their own
 */
export function fitLoop(record: LoopRecord, setup: LoopSetup, outages: readonly TimeSpan[], fromMs: number, toMs: number, chosen: { fromMs: number, toMs: number }[] | null): ModelAnswer {
  const prepared = preparedBetween(record, setup, fromMs, toMs)
  const noise = noiseOf(prepared, setup)
  const base = { tag: setup.tag, fromMs, toMs, intervalS: prepared.intervalS, noise, joint: null, restPv: null, stretches: [], leftOut: 0, reason: '', method: METHOD, source: SOURCE } satisfies ModelAnswer
  if (prepared.n === 0) return { ...base, intervalS: 0, reason: 'There are no samples in these weeks.' }
  if (!prepared.op) return { ...base, reason: 'The record holds no OP, so what it does to PV cannot be told. Add OP to the export, or type a model in.' }
  const found = findStretches(prepared, setup, outages)
  const ms = (s: Stretch) => ({ fromMs: prepared.t[s.begin], toMs: Math.round(prepared.t[s.end - 1] + prepared.intervalS * 1000) })
  const wanted = (s: Stretch) => chosen?.some(c => c.fromMs === ms(s).fromMs && c.toMs === ms(s).toMs) ?? false
  // moves first, the larger the better; what was asked for by name always
  const rank = (s: Stretch) => (wanted(s) ? 1e6 : 0) + (s.usable ? 1e3 : 0) + (s.kind === 'natural' ? Math.min(99, 100 * s.opMove / (setup.opHigh - setup.opLow)) : 100 + 100 * s.size)
  const shown = [...found].sort((a, b) => rank(b) - rank(a)).slice(0, 12)
  const fitted = shown.filter(s => s.usable).slice(0, MOST_FITTED)
  const block = Math.max(1, Math.ceil(Math.max(0, ...fitted.map(s => s.end - s.begin)) / MOST_SAMPLES_OF_A_FIT))
  const intervalS = prepared.intervalS * block
  const onOff = setup.form === 'onOff'
  const horizon = setup.settlingS / prepared.intervalS
  const compare = (stretches: Stretch[]) => {
    // half of the history before the first move: the rest must show the loop at rest, or the move looks like its start-up
    const leads = stretches.map(s => Math.floor(s.kind === 'natural' ? horizon / block / 2 : s.lead / block / 2)).filter(lead => lead >= 5)
    const quarter = Math.min(...stretches.map(s => Math.floor((s.end - s.begin) / block / 4)))
    // a cycle looks the same one period later, and half a period later with the other sign
    const longest = onOff ? Math.max(2, Math.floor(shortestPhase(prepared.op!, stretches) / block)) : leads.length === stretches.length ? Math.min(...leads) : quarter
    // the least telling of the stretches decides how careful the fit must be
    const excitation = !onOff && stretches.some(s => !s.clear) ? 'natural' as const : onOff || stretches.some(s => s.kind === 'setpointMove') ? 'setpointStep' as const : 'manualMove' as const
    return compareModels(stretches.map(s => percentOf(prepared, setup, s, block)), {
      interval: intervalS, excitation, hold: onOff || excitation === 'manualMove' ? 'zero' : 'first',
      maximumDeadTime: Math.min(quarter, longest) * intervalS,
    })
  }
  const own = new Map<Stretch, Comparison>()
  for (const s of fitted) {
    if ((s.end - s.begin) / block < 40) Object.assign(s, { usable: false, reason: 'It is too short beside the others to be fitted in the same steps; look at fewer weeks.' })
    else own.set(s, toComparison(compare([s]), setup, s.kind === 'manualMove'))
  }
  const able = fitted.filter(s => s.usable)
  const carries = (s: Stretch) => own.get(s)!.fits.some(f => f.kind === own.get(s)!.best && f.status === 'ok')
  const moves = able.filter(s => s.kind !== 'natural')
  // moves together say more than the best of them alone
  const together = chosen ? able.filter(wanted) : moves.length ? moves : able.some(carries) ? able.filter(carries) : able
  const jointFit = together.length ? compare(together) : null
  const joint = jointFit && toComparison(jointFit, setup, together.every(s => s.kind === 'manualMove'))
  const drawnKind = joint && (joint.fits.find(f => f.kind === joint.best && f.status === 'ok') ?? joint.fits.find(f => f.status === 'ok'))?.kind
  const bestFit = jointFit && usableFit(jointFit.candidates.find(c => c.kind === drawnKind)?.fit ?? jointFit.best)

  const stretches: StretchView[] = shown.sort((a, b) => a.begin - b.begin).map((s) => {
    const place = together.indexOf(s)
    return {
      ...ms(s), kind: s.kind, samples: s.end - s.begin, usable: s.usable, reason: s.reason, chosen: place >= 0, pvMove: s.pvMove, opMove: s.opMove,
      own: own.get(s) ?? null, drawing: s.usable ? drawing(prepared, setup, s, block, place >= 0 ? bestFit?.simulated[place] ?? null : null) : null,
    }
  })
  const reason = able.length ? '' : found.length ? 'No stretch of these weeks carries a model; each says why. Look at other weeks, make a test with the operator\'s consent, or type a model in.' : 'OP and PV hardly move in these weeks.'
  return { ...base, intervalS, stretches, leftOut: found.length - shown.length, joint, restPv: bestFit ? restPv(prepared, setup, together, bestFit.model) : null, reason }
}

const usableFit = (fit: ModelFit | InsufficientFit): ModelFit | null => fit.status === 'ok' ? fit : fit.best ?? null

/** PV and OP of a stretch in % of span, missing samples bridged, averaged over blocks: the same average of both leaves their relation as it is. */
function percentOf({ pv, op }: PreparedRecord, setup: LoopSetup, s: Stretch, block: number): FitStretch {
  const scaled = (x: Float64Array, low: number, high: number) => {
    const bridged = bridge(x.slice(s.begin, s.end))
    const out = new Float64Array(Math.floor(bridged.length / block))
    for (let k = 0; k < out.length; k++) {
      let sum = 0
      for (let j = 0; j < block; j++) sum += bridged[k * block + j]
      out[k] = (sum / block - low) / (high - low) * 100
    }
    return out
  }
  return { pv: scaled(pv, setup.pvLow, setup.pvHigh), op: scaled(op!, setup.opLow, setup.opHigh) }
}

function bridge(x: Float64Array): Float64Array {
  let last = -1
  for (let i = 0; i < x.length; i++) {
    if (x[i] !== x[i]) continue
    for (let j = last + 1; j < i; j++) x[j] = last < 0 ? x[i] : x[last] + (x[i] - x[last]) * (j - last) / (i - last)
    last = i
  }
  for (let j = last + 1; j < x.length; j++) x[j] = last < 0 ? 0 : x[last]
  return x
}

/** Samples of the shortest usual on or off time. */
function shortestPhase(op: Float64Array, stretches: Stretch[]): number {
  const phases: number[] = []
  for (const s of stretches) {
    let since = s.begin
    for (let i = s.begin + 1; i < s.end; i++) if (Math.abs(op[i] - op[i - 1]) > 1) { phases.push(i - since); since = i }
  }
  phases.sort((a, b) => a - b)
  return phases.length > 4 ? phases[phases.length >> 2] : Infinity
}

function toComparison({ candidates, best, reason }: ModelComparison, { action }: LoopSetup, openLoop: boolean): Comparison {
  const found = candidates.map(c => usableFit(c.fit))
  const mostExplained = Math.max(...found.map(f => f?.fitPercent ?? -Infinity))
  const fits = candidates.map(({ kind, fit }, k): FitView => {
    const known = found[k]
    const doubt = fit.status === 'ok' ? doubtOf(fit, found, mostExplained, action, openLoop) : fit.reason
    return {
      kind, status: doubt ? 'refused' : 'ok', reason: doubt, model: known?.model ?? null,
      parameters: known?.parameters ?? {}, fitPercent: known?.fitPercent ?? null, residual: known?.residualStandardDeviation ?? null, residualCorrelation: known?.residualCorrelation ?? null, samples: known?.samples ?? 0,
    }
  })
  return { best: candidates.find(c => c.fit === best)!.kind, reason, fits }
}

/** Why a fit that is sound by itself is not to be used beside what else is known; empty when it is. */
function doubtOf(fit: ModelFit, found: (ModelFit | null)[], mostExplained: number, action: LoopSetup['action'], openLoop: boolean): string {
  const gain = fit.parameters.processGain
  // a controller that works has the sign of the process; the other sign is the controller's own, seen backwards
  if (!openLoop && (gain.value > 0) !== (action === 'reverse')) return `The sign of the gain does not fit the ${action} action of the loop: either the set-up is wrong, or the data show the controller and not the process.`
  if (fit.fitPercent < mostExplained - 10) return 'It explains much less of the movement of PV than another kind of model.'
  const other = found.find(f => f && fit.model.kind === 'fopdt' && f.model.kind === 'sopdt' && f.fitPercent > fit.fitPercent - 5 && Math.abs(f.parameters.processGain.value / gain.value - 1) > 0.1 && (f.parameters.processGain.value < gain.low || f.parameters.processGain.value > gain.high))
  if (other) return `With a second lag, which explains as much, the gain becomes ${Number(other.parameters.processGain.value.toPrecision(3))} instead of ${Number(gain.value.toPrecision(3))}: the data do not say which.`
  return ''
}

function drawing({ pv, sp, op, intervalS }: PreparedRecord, setup: LoopSetup, s: Stretch, block: number, simulated: Float64Array | null): StretchView['drawing'] {
  const n = s.end - s.begin
  const stride = Math.max(1, Math.floor(n / DRAWN))
  const at = Array.from({ length: Math.ceil(n / stride) }, (_, k) => k * stride)
  const value = (v: number) => v === v && Number.isFinite(v) ? v : null
  const pick = (x: Float64Array) => at.map(k => value(x[s.begin + k]))
  return {
    t: at.map(k => k * intervalS), pv: pick(pv), sp: sp ? pick(sp) : null, op: pick(op!),
    simulated: simulated && at.map((k) => {
      const v = simulated[Math.floor(k / block)]
      return v === undefined ? null : value(setup.pvLow + v / 100 * (setup.pvHigh - setup.pvLow))
    }),
  }
}

/** PV at output 0: over a stretch as long as the lag, mean PV is what rest and gain make of mean OP. */
function restPv({ pv, op }: PreparedRecord, setup: LoopSetup, stretches: Stretch[], model: ProcessModel): number | null {
  if (model.kind === 'integrating') return null
  let [sum, n] = [0, 0]
  const gain = model.processGain * (setup.pvHigh - setup.pvLow) / (setup.opHigh - setup.opLow)
  for (const s of stretches) for (let i = s.begin; i < s.end; i++) if (pv[i] === pv[i] && op![i] === op![i]) { sum += pv[i] - gain * (op![i] - 0); n++ }
  return n ? sum / n : null
}

/** Standard deviation of the fast noise of PV from its second differences; slow movement falls out of them. */
function noiseOf({ pv, intervalS }: PreparedRecord, setup: LoopSetup): ModelAnswer['noise'] {
  const squares: number[] = []
  const stride = Math.max(1, Math.floor(pv.length / 20_000))
  for (let i = 1; i + 1 < pv.length; i += stride) {
    const e = (pv[i - 1] + pv[i + 1]) / 2 - pv[i]
    if (e === e) squares.push(Math.abs(e))
  }
  if (squares.length < 50 || !(setup.pvHigh > setup.pvLow)) return null
  // by the median, so that moves and spikes do not count as noise
  const middle = squares.sort((a, b) => a - b)[squares.length >> 1]
  return { standardDeviation: middle / 0.6745 * Math.sqrt(2 / 3), intervalS }
}
