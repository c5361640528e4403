import type { LoopSetup } from '../types'
import type { LoopScenario, SimulatedLoop } from './scenario'
import { ScenarioRun } from './scenarioRun'

/**
 * One loop's record, simulated in closed loop: at each step the sensor is read, the controller acts, the valve moves (or
 * not), the process runs on; every `intervalS` a sample is recorded, at last rounded and perhaps compressed as a historian does.
 *
 * The same set-up and scenario give the same record. A week at 10 s takes 5 to 40 ms, by `stepS`. The record has
 * floor(durationS / intervalS) samples unless only archived ones are reported.
 * @param setup controller settings (`integralTimeS` null: no integral action; `gain` null: 1) and ranges
 * @param scenario what happens to it
 * @param options stem: also return the stem position at the samples
 * @throws RangeError when `stepS` does not divide `intervalS`, on an empty duration, on set-point points out of order
 * Source: see LoopStepper, addLoad, compressTrend and the valve models.
 */
export function simulateLoop(setup: LoopSetup, scenario: LoopScenario, options: { stem?: boolean } = {}): SimulatedLoop {
  const run = new ScenarioRun(setup, scenario, 0, options.stem ?? false)
  const { stepper, sp, load, steps } = run
  const stride = Math.round(scenario.intervalS / scenario.stepS)
  let k = 0
  while (k < steps) {
    run.handleEvents(k)
    const until = Math.max(k + 1, run.nextEventStep())
    let untilSample = (stride - k % stride) % stride
    for (; k < until; k++) {
      stepper.control(sp[k])
      stepper.actuate()
      if (untilSample === 0) { run.sample(k); untilSample = stride }
      untilSample--
      stepper.advance(load[k])
    }
  }
  return run.finish()
}
