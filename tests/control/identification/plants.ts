import type { FitStretch } from '../../../shared/control/identification/fitModel'
import { simc } from '../../../shared/control/rules/simc'
import { simulateClosedLoop, type ClosedLoopCase } from '../../../shared/control/simulation/simulateClosedLoop'
import type { ProcessModel } from '../../../shared/control/types'
import { normalNumbers } from '../helpers/normalNumbers'

export interface SimulatedTest { model: ProcessModel, stretches: FitStretch[], interval: number, excitation: 'setpointStep' | 'manualMove' }

/**
 * A plant of random size under PI, with coloured upsets at its input and measurement noise, sampled by a historian five
 * times slower than the controller runs; set-point steps or OP moves fall between samples.
 * @param severity 1: noise of 1 to 5 % of the step and upsets that move PV by several per cent of it; 0.4: a good test
 */
export function simulatedTest(seed: number, kind: ProcessModel['kind'], manual: boolean, severity: number): SimulatedTest {
  const normal = normalNumbers(seed)
  const share = () => 0.5 * (1 + Math.tanh(0.8 * normal()))
  const timeConstant = 20 + 180 * share()
  const wantedDeadTime = timeConstant * (0.1 + 0.9 * share())
  const gain = (0.5 + 2 * share()) * (normal() > 0 ? 1 : -1)
  const slowest = timeConstant + wantedDeadTime
  const interval = Math.min(wantedDeadTime / 3, slowest / 30)
  const step = interval / 5
  // A whole number of steps, so that the truth is what was simulated.
  const deadTime = Math.round(wantedDeadTime / step) * step
  const model: ProcessModel = kind === 'integrating' ? { kind, processGain: gain / timeConstant, deadTime }
    : kind === 'fopdt' ? { kind, processGain: gain, timeConstant, deadTime }
      : { kind, processGain: gain, timeConstant, timeConstant2: timeConstant * (0.2 + 0.4 * share()), deadTime }
  const tuned = simc(model, { terms: 'PI' })
  if (tuned.status !== 'ok') throw new Error(tuned.reason)
  const controller = { ...tuned.controller, controllerGain: tuned.controller.controllerGain * (0.5 + share()) }
  const size = 5
  const move = kind === 'integrating' ? 5 : size / Math.abs(gain)
  const level = severity * (0.1 + 0.4 * share())
  const fade = Math.exp(-interval / (0.7 * slowest))
  const upset = (length: number) => {
    const values = [normal()]
    while (values.length * interval < length + 2 * interval) values.push(fade * values.at(-1)! + Math.sqrt(1 - fade * fade) * normal())
    const amplitude = 0.09 * severity * move * (0.5 + level)
    return (time: number) => {
      const k = Math.floor(time / interval)
      const part = time / interval - k
      return amplitude * ((1 - part) * values[k] + part * values[k + 1])
    }
  }
  const between = () => share() * interval
  const run = (changes: Partial<ClosedLoopCase> & { horizon: number }): FitStretch => {
    const { measured, op } = simulateClosedLoop({
      model, controller, step, start: { pv: 50, op: 50 }, load: upset(changes.horizon),
      noise: { standardDeviation: level * size / 10, interval: step, normal }, ...changes,
    })
    const every = (x: Float64Array) => x.filter((_, k) => k % 5 === 0)
    return { pv: every(measured), op: every(op) }
  }
  if (manual) {
    const horizon = 24 * slowest
    const at = [0.1, 0.3, 0.55, 0.75].map(part => part * horizon + between())
    const levels = [0, 1, -0.5, 0.7, 0]
    return { model, interval, excitation: 'manualMove', stretches: [run({ horizon, manualOutput: time => 50 + move * levels[at.filter(t => time >= t).length] })] }
  }
  return {
    model, interval, excitation: 'setpointStep',
    stretches: [1, -1].map(sign => run({ horizon: 12 * slowest, setpoint: { at: 2.4 * slowest + between(), size: sign * size } })),
  }
}
