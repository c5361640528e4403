/**
 * What happens to a simulated loop: its process, valve, sensor, disturbances, operators and historian. Pure data; times
 * in seconds since the start of the record, PV in the loop's unit, OP in the loop's output unit (usually per cent).
 * How the controller is set stands in the loop's `LoopSetup`.
 */
import type { ProcessModel } from '../../control/types'
import type { LoopRecord, TimeSpan, Verdict } from '../types'

/**
 * A heated chamber that loses heat by conduction and by radiation, so that its gain falls as it gets hotter. Gain and time
 * constant at the working point follow from the loss curve and `timeConstant`.
 */
export interface FurnaceModel {
  kind: 'furnace'
  /** at the working point, s */
  timeConstant: number
  /** lag of the sheathed sensor, s; 0: none */
  sensorLag: number
  deadTime: number
  /** degrees Celsius */
  ambient: number
  /** share of the losses at the working point that is radiation, 0..1 */
  radiationShare: number
}
export type SimulatedProcess = ProcessModel | FurnaceModel

export type SimulatedValve =
  | { kind: 'sound' }
  | { kind: 'deadBand', width: number }
  | { kind: 'sticking', model: 'kano' | 'choudhury' | 'he', stickBand: number, slipJump: number }

/** [fromS, toS) */
export interface Span { fromS: number, toS: number }

/** Disturbances act at the process input, in OP units, after the dead time; `spans` limits them (none: always). */
export type LoadPart = { spans?: Span[] } & (
  | { kind: 'coloured', standardDeviation: number, timeConstantS: number, seed: number }
  /** lasting changes of level, each approached over `riseS` */
  | { kind: 'steps', at: number[], size: number[], riseS: number }
  /** passing ones: a door opened for `widthS`, then recovery with a time constant */
  | { kind: 'pulses', at: number[], widthS: number, size: number, recoveryS: number }
  | { kind: 'periodic', periodS: number, amplitude: number, shape: 'sine' | 'triangle' | 'square', phase: number }
  /** another signal, e.g. the error of a loop upstream, after a lag and a delay */
  | { kind: 'signal', values: ArrayLike<number>, stepS: number, gain: number, lagS: number, delayS: number }
)

export type SetpointProgramme =
  | { kind: 'constant', value: number }
  /** from each point on: hold its value, or ramp from the value before so as to arrive at this point */
  | { kind: 'points', start: number, points: { at: number, value: number, ramp: boolean }[] }
  /** as the inner loop of a cascade sees it: slow coloured noise about a base */
  | { kind: 'wandering', base: number, standardDeviation: number, timeConstantS: number, seed: number }
  /** a set point that comes from elsewhere, linearly interpolated */
  | { kind: 'signal', values: ArrayLike<number>, stepS: number }

export type SensorFault =
  | { kind: 'frozen' }
  /** bursts of broad noise, e.g. a loose wire; standard deviation in PV units */
  | { kind: 'noisy', standardDeviation: number }
  /** single wild samples: probability per sample, height in PV units */
  | { kind: 'spiky', probability: number, height: number }
  /** broken thermocouple: the transmitter drives to this value */
  | { kind: 'burnout', value: number }
  /** no value at all */
  | { kind: 'bad' }

export interface Tuning {
  gain?: number
  integralTimeS?: number | null
  derivativeTimeS?: number | null
  filterTimeS?: number | null
  setpointWeight?: number | null
  hysteresis?: number | null
}

export type SimulationEvent = { at: number } & (
  | { kind: 'tuning', tuning: Tuning }
  | { kind: 'valve', valve: SimulatedValve }
  /** operator takes the output; `op` null: left where it is; `nudgeEveryS` > 0: now and then moved towards the set point */
  | { kind: 'manual', op: number | null, nudgeEveryS: number }
  | { kind: 'automatic' }
  | { kind: 'sensor', fault: SensorFault | null }
  | { kind: 'shutDown' }
  | { kind: 'startUp' }
  | { kind: 'historian', recording: boolean }
)

export interface HistorianCompression {
  technique: 'boxcar' | 'swingingDoor'
  /** deviation limits, in PV and OP units */
  pvDeviation: number
  opDeviation: number
  /** longest time without an archived value, s */
  longestS: number
  /** how the export gives them back: on the grid, interpolated; or only the instants that were archived */
  report: 'interpolated' | 'archived'
}

export interface LoopScenario {
  startMs: number
  durationS: number
  /** between samples, s */
  intervalS: number
  /** controller scan and integration step, s; divides intervalS */
  stepS: number
  seed: number
  process: SimulatedProcess
  /** where the process rests with this output and no load */
  workingPoint: { pv: number, op: number }
  valve: SimulatedValve
  setpoint: SetpointProgramme
  /** CAS instead of AUTO as the normal mode */
  cascade: boolean
  loads: LoadPart[]
  /** white measurement noise, standard deviation, PV unit */
  noise: number
  /** step of the transmitter's converter, PV unit; 0: none */
  resolution: number
  events: SimulationEvent[]
  decimals: { pv: number, sp: number, op: number }
  compression: HistorianCompression | null
  truth: ScenarioTruth
}

export const CAUSES = [
  'healthy', 'tightTuning', 'stickingValve', 'carriedIn', 'sluggish', 'saturated', 'leftInManual',
  'sensorFrozen', 'sensorNoisy', 'sensorSpiky', 'sensorOutOfRange', 'noiseDominated', 'tooSlow', 'compressed',
] as const
export type Cause = typeof CAUSES[number]

/** What a perfect reader of the record should say. */
export const CAUSE_VERDICT: Readonly<Record<Cause, Verdict>> = {
  healthy: 'steady', tightTuning: 'huntingTuning', stickingValve: 'huntingValve', carriedIn: 'huntingExternal',
  sluggish: 'sluggish', saturated: 'saturated', leftInManual: 'manual',
  sensorFrozen: 'sensor', sensorNoisy: 'sensor', sensorSpiky: 'sensor', sensorOutOfRange: 'sensor',
  noiseDominated: 'noise', tooSlow: 'cannotTell', compressed: 'cannotTell',
}

export interface ScenarioTruth {
  cause: Cause
  /** when the cause acts */
  spans: Span[]
  /** free facts for the reader: stick band, period, gain margin … */
  facts: Record<string, number | string>
}

export interface LoopTruth {
  tag: string
  cause: Cause
  verdict: Verdict
  spans: TimeSpan[]
  facts: Record<string, number | string>
  process: SimulatedProcess
  valve: SimulatedValve
}

export interface SimulatedLoop {
  record: LoopRecord
  truth: LoopTruth
  /** stem position at the samples, for tests and pictures */
  stem: Float64Array | null
}

export const MODE_NAMES = ['AUTO', 'MAN', 'CAS']
