import type { LoopSetup, LoopType } from '../types'
import type { ProcessModel } from '../../control/types'
import type { SeededRandom } from '../statistics/seededRandom'
import type { SimulatedProcess } from './scenario'

/** A process with its sensor, range and a sound tuning: the ground on which a cause is drawn. */
export interface DrawnLoop {
  setup: LoopSetup
  process: SimulatedProcess
  /** the furnace linearised, others as they are */
  linear: ProcessModel
  workingPoint: { pv: number, op: number }
  stepS: number
  intervalS: number
  /** usual measurement noise, PV unit */
  noise: number
  /** wished closed-loop time constant, s */
  closedLoopS: number
  decimals: { pv: number, sp: number, op: number }
}

/** What is given instead of drawn. */
export interface GivenRange {
  low: number
  high: number
  unit: string
  /** PV at the working point */
  at: number
  /** true: output rises with the PV */
  direct?: boolean
  tolerance?: number
}

interface Kind {
  /** largest controller gain that people use: noise would wear the valve */
  mostGain: number
  span: number[]
  unit: string[]
  tauS: [number, number]
  deadS: [number, number]
  gain: [number, number]
  /** of span */
  noise: [number, number]
  tolerance: number
  filterS: [number, number]
  /** closed-loop time constant / effective dead time */
  calm: [number, number]
  intervalS: number[]
  settlingS: number
  prefix: string
}

const KINDS: Record<LoopType, Kind> = {
  flow: { mostGain: 2, span: [12, 40, 120, 250], unit: ['m3/h', 't/h'], tauS: [2, 7], deadS: [1, 4], gain: [0.6, 1.6], noise: [0.0015, 0.004], tolerance: 0.02, filterS: [0.5, 2.5], calm: [1, 2.5], intervalS: [2, 5], settlingS: 30, prefix: 'FIC' },
  pressure: { mostGain: 8, span: [6, 10, 16, 25], unit: ['bar', 'mbar'], tauS: [12, 80], deadS: [2, 8], gain: [0.6, 2], noise: [0.0006, 0.002], tolerance: 0.02, filterS: [0, 3], calm: [1.2, 3], intervalS: [5], settlingS: 120, prefix: 'PIC' },
  level: { mostGain: 5, span: [100], unit: ['%'], tauS: [300, 1500], deadS: [3, 15], gain: [1, 1], noise: [0.001, 0.004], tolerance: 0.03, filterS: [0, 5], calm: [4, 14], intervalS: [10], settlingS: 600, prefix: 'LIC' },
  temperature: { mostGain: 10, span: [150, 250, 400, 600], unit: ['degC'], tauS: [150, 900], deadS: [15, 90], gain: [0.6, 2.2], noise: [0.0002, 0.0008], tolerance: 0.01, filterS: [0, 8], calm: [1.2, 3.5], intervalS: [10, 20], settlingS: 1800, prefix: 'TIC' },
  analysis: { mostGain: 4, span: [14, 21, 100], unit: ['pH', '%', 'ppm'], tauS: [200, 900], deadS: [60, 300], gain: [0.5, 1.5], noise: [0.001, 0.003], tolerance: 0.02, filterS: [0, 20], calm: [1.2, 3], intervalS: [30, 60], settlingS: 3600, prefix: 'AIC' },
  other: { mostGain: 4, span: [100, 1000], unit: ['rpm', '%'], tauS: [5, 40], deadS: [2, 8], gain: [0.6, 1.6], noise: [0.001, 0.003], tolerance: 0.02, filterS: [0, 2], calm: [1.2, 3], intervalS: [5], settlingS: 120, prefix: 'SIC' },
}

/**
 * Draws a loop of a type: dynamics usual for it, a range, and PI or PID settings by SIMC for a calm closed loop.
 * @param random source of the draw
 * @param intervalS sampling interval, s; undefined: one usual for the type
 * @param slower factor on all times of the process, > 0
 * @param range undefined: drawn
 * Source: ranges are common practice, no source; rule: S. Skogestad (2003), J. Process Control 13:291-309, with its half
 * rule for second lag, filter and hold.
 */
export function drawLoop(type: LoopType, random: Pick<SeededRandom, 'uniform' | 'integer'>, intervalS: number | undefined, slower: number, range?: GivenRange): DrawnLoop {
  const kind = KINDS[type]
  const between = ([a, b]: [number, number]) => a * (b / a) ** random.uniform()
  const linearBetween = ([a, b]: [number, number]) => a + (b - a) * random.uniform()
  const pick = <T>(list: T[]): T => list[random.integer(list.length)]
  const drawnSpan = pick(kind.span)
  const drawnUnit = pick(kind.unit)
  const low = range?.low ?? 0
  const span = range ? range.high - range.low : drawnSpan
  const unit = range?.unit ?? drawnUnit
  const interval = intervalS ?? pick(kind.intervalS)
  const timeConstant = slower * between(kind.tauS)
  const deadTime = slower * between(kind.deadS)
  const gain = between(kind.gain)
  const drawnDirect = random.uniform() < 0.3
  const direct = range ? range.direct ?? false : drawnDirect
  const second = random.uniform()
  const shape = random.uniform()
  const furnaceLike = type === 'temperature' && !direct && (range?.at ?? 100) > 60 && (shape > 0.72 || (range?.at ?? 0) > 500)
  const lag2 = second < 0.45 ? 0 : timeConstant * (0.08 + 0.3 * random.uniform())
  const filterTimeS = random.uniform() < 0.5 ? 0 : linearBetween(kind.filterS) * slower
  const signed = (direct ? -gain : gain) * span / 100
  const op = 35 + 28 * random.uniform()
  const share = 0.4 + 0.25 * random.uniform()
  const pv = range?.at ?? span * share

  let linear: ProcessModel
  let process: SimulatedProcess
  if (type === 'level' && shape < 0.9) linear = process = { kind: 'integrating', processGain: signed / timeConstant, deadTime }
  else if (furnaceLike) {
    const ambient = 20
    const radiationShare = span > 300 ? 0.7 : 0.2
    process = { kind: 'furnace', timeConstant, sensorLag: lag2, deadTime, ambient, radiationShare }
    const slope = op * ((1 - radiationShare) / (pv - ambient) + radiationShare * 4 * (pv + 273.15) ** 3 / ((pv + 273.15) ** 4 - (ambient + 273.15) ** 4))
    linear = lag2 > 0
      ? { kind: 'sopdt', processGain: 1 / slope, timeConstant, timeConstant2: lag2, deadTime }
      : { kind: 'fopdt', processGain: 1 / slope, timeConstant, deadTime }
  }
  else {
    linear = process = lag2 > 0 && type !== 'level'
      ? { kind: 'sopdt', processGain: signed, timeConstant, timeConstant2: lag2, deadTime }
      : { kind: 'fopdt', processGain: signed, timeConstant, deadTime }
  }

  const wish = Math.max(Math.min((deadTime + lag2) / 1.5, timeConstant / 2), Math.min(1, interval))
  const stepS = interval / Math.max(1, Math.ceil(interval / wish - 1e-9))

  const two = linear.kind === 'sopdt' ? linear.timeConstant2 : 0
  const wantsDerivative = two > 0 && random.uniform() < 0.5
  const effectiveDead = deadTime + stepS / 2 + filterTimeS + (wantsDerivative ? 0.1 * two : two / 2)
  const k = Math.abs(linear.processGain) * 100 / span
  const integrating = linear.kind === 'integrating'
  const effectiveLag = timeConstant + (wantsDerivative || integrating ? 0 : two / 2)
  const most = kind.mostGain * (0.3 + 0.7 * random.uniform())
  const closedLoopS = Math.max(between(kind.calm) * effectiveDead, (integrating ? 1 : effectiveLag) / (k * most) - effectiveDead)
  let controllerGain: number
  let integralTime: number
  if (integrating) {
    controllerGain = 1 / (k * (closedLoopS + effectiveDead))
    integralTime = 4 * (closedLoopS + effectiveDead)
  }
  else {
    controllerGain = effectiveLag / (k * (closedLoopS + effectiveDead))
    integralTime = Math.min(effectiveLag, 4 * (closedLoopS + effectiveDead))
  }
  const tidy = (x: number) => Number(x.toPrecision(3))
  const setup: LoopSetup = {
    tag: `${kind.prefix}-${100 + random.integer(900)}`, type, pvLow: low, pvHigh: low + span, pvUnit: unit, opLow: 0, opHigh: 100,
    normalModes: ['AUTO', 'CAS'], tolerance: range?.tolerance ?? tidy(kind.tolerance * span), priority: (1 + random.integer(3)) as 1 | 2 | 3,
    deadTimeS: random.uniform() < 0.6 ? tidy(deadTime) : null, settlingS: kind.settlingS,
    form: wantsDerivative ? 'series' : 'ideal', action: direct ? 'direct' : 'reverse',
    gain: tidy(controllerGain), integralTimeS: tidy(integralTime), derivativeTimeS: wantsDerivative ? tidy(two) : null,
    filterTimeS: filterTimeS > 0 ? tidy(filterTimeS) : null, setpointWeight: random.uniform() < 0.3 ? 0.5 : null, hysteresis: null, upstream: [],
  }
  const decimals = span >= 400 ? 1 : span >= 20 ? 2 : span >= 1 ? 3 : 4
  return {
    setup, process, linear, workingPoint: { pv, op }, stepS, intervalS: interval,
    noise: span * between(kind.noise), closedLoopS, decimals: { pv: decimals, sp: decimals, op: 2 },
  }
}
