import type { LoopSetup } from '../types'
import type { LoadPart, LoopScenario, SimulatedLoop } from './scenario'
import { simulateCascade } from './simulateCascade'
import { simulateLoop } from './simulateLoop'

export interface PlantLoop {
  setup: LoopSetup
  scenario: LoopScenario
  area: string
  description: string
  /** index of the loop whose output is this loop's set point */
  primary: number | null
  /** upsets that arrive from other loops: their control error, in per cent of span, times `gain` in OP units */
  carriedFrom: { source: number, gain: number, lagS: number, delayS: number }[]
}

/** What may be kept between calls for one plan: the errors of sources, and nothing else. */
export type PlantMemory = Map<number, Float32Array>

/**
 * One loop of a plant, together with what it depends on: upsets from other loops are simulated first (and remembered),
 * the two loops of a cascade run coupled. Loops can be asked for in any order and from any thread.
 *
 * @param plan all loops; a source must not depend, over others, on the loop it reaches
 * @param index 0..length-1
 * @param memory kept by the caller between calls with the same plan; saves simulating a source again
 * @throws RangeError on an unknown index or on sources that form a ring
 * Source: common practice, no source.
 */
export function simulatePlantLoop(plan: readonly PlantLoop[], index: number, memory: PlantMemory = new Map()): SimulatedLoop {
  const loop = plan[index]
  if (!loop) throw new RangeError(`loop index must be 0..${plan.length - 1}, got ${index}`)
  if (loop.primary !== null) return simulateCascade(resolve(plan, loop.primary, memory, []), resolve(plan, index, memory, [])).secondary
  const secondary = plan.findIndex(other => other.primary === index)
  if (secondary >= 0) return simulateCascade(resolve(plan, index, memory, []), resolve(plan, secondary, memory, [])).primary
  const { setup, scenario } = resolve(plan, index, memory, [])
  return simulateLoop(setup, scenario)
}

function resolve(plan: readonly PlantLoop[], index: number, memory: PlantMemory, path: number[]): { setup: LoopSetup, scenario: LoopScenario } {
  const { setup, scenario, carriedFrom } = plan[index]
  if (carriedFrom.length === 0) return { setup, scenario }
  if (path.includes(index)) throw new RangeError(`loops ${[...path, index].map(i => plan[i].setup.tag).join(' -> ')} carry an upset in a ring`)
  const parts = carriedFrom.map(({ source, gain, lagS, delayS }): LoadPart => {
    let values = memory.get(source)
    if (!values) {
      const from = resolve(plan, source, memory, [...path, index])
      const { record } = simulateLoop(from.setup, { ...from.scenario, compression: null })
      const scale = 100 / (from.setup.pvHigh - from.setup.pvLow)
      // an outage or a missing value carries nothing on
      values = Float32Array.from(record.pv, (x, i) => x - record.sp![i] === x - record.sp![i] ? Math.max(-20, Math.min(20, (x - record.sp![i]) * scale)) : 0)
      memory.set(source, values)
    }
    return { kind: 'signal', values, stepS: plan[source].scenario.intervalS, gain, lagS, delayS }
  })
  return { setup, scenario: { ...scenario, loads: [...scenario.loads, ...parts] } }
}
