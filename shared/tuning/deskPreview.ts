import { doorOpened } from '../control/simulation/doorOpened'
import { responseFigures, type ResponseFigures } from '../control/simulation/responseFigures'
import { simulateClosedLoop, type ClosedLoopResponse, type Upset } from '../control/simulation/simulateClosedLoop'
import type { IdealPid, ProcessModel } from '../control/types'
import { noiseFor } from './noiseFor'

export interface PreviewConditions {
  model: ProcessModel
  horizon: number
  /** where the loop stands, % of span */
  start: { pv: number, op: number }
  /** % of PV span, signed */
  setpointChange: number
  /** % of OP span, what the load step is worth */
  loadChange: number
  noise: { standardDeviation: number, intervalS: number } | null
  /** % of OP span */
  valve: { stickBand: number, slipJump: number } | null
  /** s the door stands open, and how far PV drops by the air alone, % of span; instead of the load step */
  door: { openFor: number, airDrop: number } | null
}

export interface PreviewCurve { name: string, response: ClosedLoopResponse, figures: ResponseFigures, reachesLimit: boolean }
export interface Preview { setpoint: PreviewCurve[], load: PreviewCurve[] }
export interface Candidate { name: string, ideal: IdealPid, setpointFilterTime: number }

const STEPS = 2500

/** Old against new under the same conditions, in % of span. Output limits are 0 and 100 %. A few ms for two candidates. */
export function deskPreview(candidates: readonly Candidate[], c: PreviewConditions): Preview {
  const at = 0.04 * c.horizon
  const upsets: Upset[] = c.door
    ? doorOpened({ at, openFor: c.door.openFor, airDrop: c.door.airDrop, heatLoss: Math.abs(c.loadChange), chargeLoss: Math.abs(c.loadChange) / 2, chargeFor: 2 * c.door.openFor })
    : [{ at, size: c.loadChange }]
  // cold air lowers PV whatever the direction of the process; heat loss is OP that is missing
  if (c.door && c.model.processGain < 0) upsets.forEach((u) => { if (u.enters !== 'output') u.size = -u.size })
  const run = ({ name, ideal, setpointFilterTime }: Candidate, scenario: { setpoint?: { at: number, size: number }, upsets?: Upset[] }): PreviewCurve => {
    const response = simulateClosedLoop({
      model: c.model, controller: ideal, setpointFilterTime, horizon: c.horizon, maximumSteps: STEPS, start: c.start, outputLimits: { low: 0, high: 100 }, ...scenario,
      ...(c.noise && c.noise.standardDeviation > 0 && { noise: { standardDeviation: c.noise.standardDeviation, interval: c.noise.intervalS, normal: noiseFor() } }),
      ...(c.valve && c.valve.stickBand > 0 && { valve: c.valve }),
    })
    return { name, response, figures: responseFigures(response), reachesLimit: response.op.some(op => op <= 0 || op >= 100) }
  }
  return {
    setpoint: candidates.map(x => run(x, { setpoint: { at, size: c.setpointChange } })),
    load: candidates.map(x => run(x, { upsets })),
  }
}

/** At most `points` of a curve, for drawing: the extremes of each bin stay. */
export function thinCurve(time: Float64Array, values: Float64Array, points = 240): [number, number][] {
  const n = time.length
  const bin = Math.max(1, Math.ceil(n / (points / 2)))
  const out: [number, number][] = []
  for (let from = 0; from < n; from += bin) {
    let low = from
    let high = from
    for (let k = from; k < Math.min(n, from + bin); k++) {
      if (values[k] < values[low]) low = k
      if (values[k] > values[high]) high = k
    }
    for (const k of low === high ? [low] : low < high ? [low, high] : [high, low]) out.push([time[k], values[k]])
  }
  return out
}
