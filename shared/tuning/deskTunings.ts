import { margins } from '../control/margins/margins'
import { allTunings } from '../control/rules/allTunings'
import { averagingLevel } from '../control/rules/averagingLevel'
import { firstOrderModel } from '../control/rules/firstOrderModel'
import { compareTunings } from '../control/simulation/compareTunings'
import { valveTravelFromNoise } from '../control/simulation/valveTravelFromNoise'
import type { Conversion, DisplayedController, IdealPid, ProcessModel, RuleResult } from '../control/types'
import { noiseFor } from './noiseFor'
import { idealOf, shownAs } from './storedController'

/** A tuning on the desk. Everything is in % of span and s; `shown` is what goes into the control system. */
export interface DeskTuning {
  key: string
  name: string
  /** `advised` answer to the slider, `known` are published settings for comparison */
  group: 'present' | 'advised' | 'known' | 'own'
  ideal: IdealPid | null
  shown: Conversion<DisplayedController> | null
  /** why there is none */
  reason: string
  source: string
  domain: string
  withinDomain: boolean
  closedLoopTime: number | null
}

export interface DeskFigures {
  stable: boolean
  maximumSensitivity: number
  gainMargin: number
  phaseMarginDeg: number
  delayMargin: number
  /** % of span x s, for a set-point step and a load step of 1 % each */
  setpointIae: number
  loadIae: number
  overshootPercent: number
  /** % of OP span for a set-point step of 1 % */
  peakOutput: number
  /** % of OP span per hour; null without a noise figure */
  noiseTravelPerHour: number | null
}

type Like = Pick<DisplayedController, 'form' | 'gainUnit' | 'timeUnit'>
/** The same rule may answer with PI and with PID. */
const keyOf = (r: RuleResult, i: number) => `${r.rule}-${i}`
const advised = new Set(['SIMC', 'Lambda PI', 'Averaging level PI'])

/** What each rule makes of a model at a position of the slider, in the loop's own form. */
export function deskTunings(model: ProcessModel, position: number, like: Like, level?: { largestUpset: number, allowedDeviation: number }): DeskTuning[] {
  const rules: RuleResult[] = [...allTunings(model, position), ...(level && model.kind === 'integrating' ? [averagingLevel(model, level)] : [])]
  return rules.map((rule, i): DeskTuning => {
    const group = [...advised].some(name => rule.rule.startsWith(name)) ? 'advised' : 'known'
    const common = { key: keyOf(rule, i), name: rule.rule, group, source: rule.source } as const
    if (rule.status === 'notApplicable') return { ...common, ideal: null, shown: null, reason: rule.reason, domain: '', withinDomain: false, closedLoopTime: null }
    const shown = roundedSettings(shownAs(rule.controller, like))
    // what is previewed is what will be typed in, not the rule's endless digits
    const back = shown.status === 'ok' ? idealOf(shown.value) : null
    return { ...common, ideal: back?.status === 'ok' ? back.value : rule.controller, shown, reason: '', domain: rule.domain, withinDomain: rule.withinDomain, closedLoopTime: rule.closedLoopTime }
  })
}

/** Three significant digits: more than any controller repeats, and what a person can type. */
function roundedSettings(shown: Conversion<DisplayedController>): Conversion<DisplayedController> {
  if (shown.status !== 'ok') return shown
  const round = (v: number | null) => v === null ? null : Number(v.toPrecision(3))
  const { gain, integral, derivative } = shown.value
  return { status: 'ok', value: { ...shown.value, gain: round(gain)!, integral: round(integral), derivative: round(derivative) } }
}

/** s: long enough for the slower of the controllers to settle, and not so long that nothing can be seen. */
export function horizonFor(model: ProcessModel, controllers: readonly IdealPid[]): number {
  const first = firstOrderModel(model)
  const lag = first.kind === 'integrating' ? 0 : first.timeConstant
  const scale = first.deadTime + lag
  const each = controllers.map((c) => {
    const loopGain = Math.abs(first.processGain * c.controllerGain)
    const integral = Number.isFinite(c.integralTime) ? c.integralTime : 0
    const reach = first.kind === 'integrating' ? 1 / loopGain : integral / Math.max(loopGain, 1e-9)
    return Math.max(8 * (first.deadTime + reach), 4 * integral, 3 * lag)
  })
  return Math.min(Math.max(...each, 10 * first.deadTime, 3 * lag, 1), 60 * Math.max(scale, ...(first.kind === 'integrating' ? each.map(h => h / 8) : [0])))
}

/** s: fine enough for a figure of three digits, a whole part of the dead time, and no finer, because the slider waits for it. */
function stepFor(model: ProcessModel, { derivativeTime, derivativeFilterFactor = 10 }: IdealPid, horizon: number): number {
  const wanted = Math.min(horizon / 2500, ...(derivativeTime > 0 ? [Math.max(derivativeTime / derivativeFilterFactor / 2, horizon / 8000)] : []), ...(model.deadTime > 0 ? [Math.max(model.deadTime / 20, horizon / 6000)] : []))
  return model.deadTime > wanted ? model.deadTime / Math.ceil(model.deadTime / wanted) : wanted
}

/** Margins and figures of one tuning; about 3 ms. Limits, noise and valve are left out, so that tunings compare like for like. */
export function deskFigures(model: ProcessModel, ideal: IdealPid, horizon: number, noise: { standardDeviation: number, intervalS: number } | null, setpointFilterTime = 0): DeskFigures {
  const m = margins(model, ideal)
  const base = { stable: m.stable, maximumSensitivity: m.maximumSensitivity, gainMargin: m.gainMargin, phaseMarginDeg: m.phaseMarginDeg, delayMargin: m.delayMargin }
  if (!m.stable) return { ...base, setpointIae: Infinity, loadIae: Infinity, overshootPercent: NaN, peakOutput: NaN, noiseTravelPerHour: null }
  const [run] = compareTunings([{ controller: ideal, setpointFilterTime }], { model, horizon, step: stepFor(model, ideal, horizon), setpointChange: 1, upsets: [{ at: 0, size: 1 }] })
  return {
    ...base, setpointIae: run.setpoint.figures.iae, loadIae: run.load.figures.iae, overshootPercent: run.setpoint.figures.overshootPercent, peakOutput: Math.abs(run.setpoint.figures.peakOutputChange),
    noiseTravelPerHour: noise && noise.standardDeviation > 0 ? valveTravelFromNoise(model, ideal, { standardDeviation: noise.standardDeviation, interval: noise.intervalS, normal: noiseFor() }) : null,
  }
}
