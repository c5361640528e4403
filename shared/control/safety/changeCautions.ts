import type { Margins } from '../margins/margins'
import type { IdealPid, ProcessModel } from '../types'

export interface Caution {
  code: 'largeChange' | 'wrongAction' | 'unstable' | 'littleRobustness' | 'doubt' | 'repairFirst' | 'derivativeOnNoise' | 'moreValveTravel' | 'modelUncertain' | 'outsideDomain' | 'noIntegral' | 'outputLimits' | 'always'
  /** `stop`: do not carry this out; `warn`: look again; `note`: goes with every change. */
  level: 'stop' | 'warn' | 'note'
  sentence: string
}

export interface ProposedChange {
  present: IdealPid | null
  proposed: IdealPid
  model?: ProcessModel
  margins?: Margins
  /** Margins of the worst case in doubt. */
  worstMargins?: Margins
  verdict?: string
  /** OP travel from noise, proposed over present. */
  noiseTravelRatio?: number
  modelStatus?: 'ok' | 'insufficient' | 'typedIn'
  withinDomain?: boolean
  /** The previewed response reaches an output limit. */
  reachesOutputLimit?: boolean
}

/**
 * Cautions that go with a change of tuning, in plain sentences, the gravest first. Never empty: the standing ones are always there.
 * @throws nothing
 * Source: factor of 2 in gain or integral time and the standing cautions: our rule (common practice, no source);
 *   Ms above 2 as little robustness: Åström, Hägglund (2006), usual range 1.4 to 2.
 */
export function changeCautions(change: ProposedChange): Caution[] {
  const { present, proposed, model, margins, worstMargins, verdict } = change
  const cautions: Caution[] = []
  const add = (code: Caution['code'], level: Caution['level'], sentence: string) => cautions.push({ code, level, sentence })

  if ((model && model.processGain * proposed.controllerGain < 0) || (present && present.controllerGain * proposed.controllerGain < 0)) {
    add('wrongAction', 'stop', 'The direction of action does not fit: the controller would push PV away from the set point. Check direct / reverse action and the sign of the process gain before anything else.')
  }
  else if (margins && !margins.stable) add('unstable', 'stop', 'With this model the loop would not be stable. Do not carry this out.')
  if (verdict === 'huntingValve') add('repairFirst', 'stop', 'The verdict says that the valve sticks. Retuning will not cure this: repair first, then tune.')
  if (verdict === 'sensor') add('repairFirst', 'stop', 'The verdict doubts the sensor. Put the measurement right first, then tune.')
  if (verdict === 'huntingExternal') add('repairFirst', 'warn', 'The verdict says that the hunting is carried in from elsewhere. Work on its source first; tuning this loop treats a symptom.')
  if (margins?.stable && margins.maximumSensitivity > 2) add('littleRobustness', 'warn', `Little robustness: the largest sensitivity Ms is ${margins.maximumSensitivity.toFixed(2)}; the usual range is 1.4 to 2.`)
  if (worstMargins && !worstMargins.stable && margins?.stable !== false) add('doubt', 'warn', 'Where the model is wrong by the amounts shown, the loop would hunt or run away. Choose a slower closed loop or get a better model.')
  if (present) {
    const factor = (before: number, after: number) => before === after ? 1 : Math.max(before / after, after / before)
    const gain = factor(Math.abs(present.controllerGain), Math.abs(proposed.controllerGain))
    if (gain > 2) add('largeChange', 'warn', `The gain changes by a factor of ${shown(gain)}. Go there in steps of at most 2 and watch the loop after each.`)
    const integral = factor(present.integralTime, proposed.integralTime)
    if (integral === Infinity) add('largeChange', 'warn', `Integral action is switched ${present.integralTime === Infinity ? 'on' : 'off'}. Expect a different way of settling; watch the loop.`)
    else if (integral > 2) add('largeChange', 'warn', `The integral time changes by a factor of ${shown(integral)}. Go there in steps of at most 2 and watch the loop after each.`)
    if (proposed.derivativeTime > 0 && present.derivativeTime === 0) add('derivativeOnNoise', 'warn', 'Derivative action is switched on: it passes on measurement noise and kicks on spikes. Make sure that PV is filtered and that the derivative works on PV, not on the error.')
  }
  if (change.noiseTravelRatio !== undefined && change.noiseTravelRatio > 2) add('moreValveTravel', 'warn', `Noise alone would move the valve ${shown(change.noiseTravelRatio)} times as far as now. That wears it out; filter PV or take less gain or derivative.`)
  if (verdict === 'noise' && proposed.derivativeTime > 0) add('derivativeOnNoise', 'warn', 'The loop is dominated by noise; derivative action would pass it on to the valve.')
  if (proposed.integralTime === Infinity) add('noIntegral', 'warn', 'Without integral action PV will settle short of the set point (offset).')
  if (change.modelStatus === 'insufficient') add('modelUncertain', 'stop', 'The data do not carry this model. Do not tune on it; make a test with the operator\'s consent or wait for better data.')
  if (change.modelStatus === 'typedIn') add('modelUncertain', 'warn', 'The model was typed in, not found from this loop\'s data. Check it against a response before relying on the preview.')
  if (change.withinDomain === false) add('outsideDomain', 'warn', 'The rule is used outside the processes it was made for. Its numbers are arithmetic here, not advice.')
  if (change.reachesOutputLimit) add('outputLimits', 'warn', 'The previewed response drives the output to a limit. Make sure that the limits are meant and that the equipment stands it.')
  add('always', 'note', 'Follow the site\'s management of change and permit to work, and tell the operator before any test or change.')
  add('always', 'note', 'Keep safety instrumented functions, interlocks and protective trips out of scope; local codes, the equipment maker\'s limits and the judgement of licensed or qualified persons come first.')
  add('always', 'note', 'Write down the settings as found, keep them at hand, and go back to them if PV or OP leaves the range agreed with the operator.')
  const rank = { stop: 0, warn: 1, note: 2 }
  return cautions.sort((a, b) => rank[a.level] - rank[b.level])
}

const shown = (factor: number) => factor === Infinity ? 'infinity' : factor.toPrecision(2)
