import type { LoopSetup } from '../types'
import type { LoopScenario, SimulatedLoop } from './scenario'
import { ScenarioRun } from './scenarioRun'

/**
 * Two loops in cascade, coupled both ways: the primary's output, over its limits, is the secondary's set point over its
 * range, and what the secondary delivers drives the primary's process. So a sticking valve in the secondary disturbs both.
 *
 * Cost as for two single loops at the secondary's step. While the secondary is in manual its set point still follows the
 * primary's output (no tracking back). The set-point programme of the secondary's scenario is not used.
 * @param primary its step must be a whole multiple of the secondary's; both must last equally long
 * @returns both records with their truths
 * @throws RangeError when the steps or durations do not fit
 * Source: common practice, no source.
 */
export function simulateCascade(primary: { setup: LoopSetup, scenario: LoopScenario }, secondary: { setup: LoopSetup, scenario: LoopScenario }): { primary: SimulatedLoop, secondary: SimulatedLoop } {
  const every = Math.round(primary.scenario.stepS / secondary.scenario.stepS)
  if (every < 1 || Math.abs(every * secondary.scenario.stepS - primary.scenario.stepS) > 1e-9)
    throw new RangeError(`the primary's step must be a multiple of the secondary's, got ${primary.scenario.stepS} s and ${secondary.scenario.stepS} s`)
  const outer = new ScenarioRun(primary.setup, primary.scenario, 0, false)
  const inner = new ScenarioRun(secondary.setup, secondary.scenario, 1, false)
  if (outer.steps * every !== inner.steps)
    throw new RangeError(`both loops of a cascade must last equally long, got ${primary.scenario.durationS} s and ${secondary.scenario.durationS} s`)
  const { opLow, opHigh } = primary.setup
  const { pvLow, pvHigh } = secondary.setup
  const toSetpoint = (pvHigh - pvLow) / (opHigh - opLow)
  for (let k = 0; k < outer.steps; k++) {
    outer.handleEvents(k)
    outer.stepper.control(outer.sp[k])
    outer.sample(k)
    const sp = pvLow + (outer.stepper.op - opLow) * toSetpoint
    let delivered = 0
    for (let j = k * every; j < (k + 1) * every; j++) {
      inner.handleEvents(j)
      inner.sp[j] = sp
      inner.stepper.control(sp)
      inner.stepper.actuate()
      inner.sample(j)
      inner.stepper.advance(inner.load[j])
      delivered += inner.stepper.truePv
    }
    outer.stepper.stem = opLow + (delivered / every - pvLow) / toSetpoint
    outer.stepper.advance(outer.load[k])
  }
  return { primary: outer.finish(), secondary: inner.finish() }
}
