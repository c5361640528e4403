/**
 * Types of the numerical core of control that server and browser share.
 * Times are seconds. Gains of controllers are dimensionless (per cent of output span per per cent of PV span)
 * unless a name says otherwise. Nothing here knows of Vue, Nitro, Knex, zod, files, clocks or random sources.
 */

/** Interaction form of a PID controller; `onOff` is a two-position controller with hysteresis. */
export type ControllerForm = 'ideal' | 'series' | 'parallel' | 'onOff'

/** `reverse`: output rises when the process variable falls (heating). `direct`: the opposite (cooling, level by outflow). */
export type ControllerAction = 'direct' | 'reverse'

/**
 * A PID in the ideal form: u = Kc [(b r - y) + (1/Ti) integral(r - y) - Td d(yf)/dt], yf = y / (1 + Td/N s).
 * `integralTime` Infinity means no integral action; `derivativeTime` 0 means none.
 */
export interface IdealPid {
  controllerGain: number
  integralTime: number
  derivativeTime: number
  /** 0..1, weight b of the set point in the proportional part; 1 when left out. */
  setpointWeight?: number
  /** N of the derivative filter; 10 when left out. */
  derivativeFilterFactor?: number
  /** First-order filter on the measurement, seconds; 0 when left out. */
  measurementFilterTime?: number
}

/** Process models; gains in PV unit per OP unit (or per cent per per cent, as the caller chooses), times in seconds. */
export type ProcessModel =
  | { kind: 'fopdt', processGain: number, timeConstant: number, deadTime: number }
  | { kind: 'sopdt', processGain: number, timeConstant: number, timeConstant2: number, deadTime: number }
  | { kind: 'integrating', /** PV unit per OP unit per second */ processGain: number, deadTime: number }

/**
 * A controller as the control system shows it. What the numbers mean depends on the form:
 * `ideal` and `series` show times (or repeats per minute), `parallel` shows the integral gain per second or minute
 * and the derivative gain times seconds or minutes.
 */
export interface DisplayedController {
  form: 'ideal' | 'series' | 'parallel'
  action: ControllerAction
  /** Positive; the direction is in `action`. */
  gain: number
  gainUnit: 'gain' | 'proportionalBand'
  /** null or 0: integral action off. */
  integral: number | null
  /** null or 0: derivative action off. With `repeatsPerMin` it is in minutes. */
  derivative: number | null
  timeUnit: 's' | 'min' | 'repeatsPerMin'
  setpointWeight?: number
  derivativeFilterFactor?: number
  measurementFilterTime?: number
}

/** A series PID: Kc' (1 + 1/(Ti' s)) (1 + Td' s). */
export interface SeriesPid { controllerGain: number, integralTime: number, derivativeTime: number }
/** A parallel PID: proportional + integral gain / s + derivative gain * s; 1/s and s. */
export interface ParallelPid { proportionalGain: number, integralGain: number, derivativeGain: number }

/** A conversion that may be impossible; `reason` is a sentence for the reader. */
export type Conversion<T> = { status: 'ok', value: T } | { status: 'impossible', reason: string }

/** What a tuning rule answers. `withinDomain` false: the arithmetic holds, the advice does not. */
export type RuleResult =
  | {
    status: 'ok'
    rule: string
    controller: IdealPid
    /** s; only of rules that aim at one. */
    closedLoopTime: number | null
    source: string
    domain: string
    withinDomain: boolean
  }
  | { status: 'notApplicable', rule: string, reason: string, source: string }

/** One of the terms a rule may be asked for. */
export type PidTerms = 'P' | 'PI' | 'PID'
