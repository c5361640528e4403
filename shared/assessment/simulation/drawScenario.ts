import type { LoopSetup, LoopType } from '../types'
import { seededRandom, type SeededRandom } from '../statistics/seededRandom'
import { drawLoop, type DrawnLoop } from './drawLoop'
import { mixSeed } from './mixSeed'
import { CAUSES, CAUSE_VERDICT, type Cause, type LoopScenario, type LoopTruth } from './scenario'
import { buildCause } from './buildCause'
import { Redraw, type Draft, type DrawOptions } from './draft'

const TYPES: readonly LoopType[] = ['flow', 'pressure', 'level', 'temperature', 'analysis', 'other']
const DAY = 86_400

/**
 * A loop with a cause of trouble built in: set-up, scenario and truth, drawn from a seed. Well tuned, sensibly disturbed loops
 * are the ground; the cause is then made large enough to matter (a hunting swing of at least 0.7 of the tolerance), by short
 * trial simulations, and draws in which it stays invisible are thrown away.
 *
 * The same arguments give the same draw. Mostly 5 to 30 ms.
 * @param seed integer 0..2^32-1
 * @param options days > 0; intervalS: process times are stretched where the interval could not show the hunting
 * @throws RangeError when no draw out of 120 shows the cause
 * Source: common practice, no source; tuning by S. Skogestad (2003).
 */
export function drawScenario(cause: Cause, type: LoopType, seed: number, options: DrawOptions): { setup: LoopSetup, scenario: LoopScenario, truth: LoopTruth } {
  let slower = options.slower ?? 1
  const stream = mixSeed(seed, 10 * CAUSES.indexOf(cause) + TYPES.indexOf(type))
  for (let attempt = 0; attempt < 120; attempt++) {
    try {
      const random = seededRandom(mixSeed(stream, attempt))
      const intervalS = cause === 'tooSlow' ? undefined : options.intervalS
      const loop = drawLoop(type, random, intervalS, slower, options.range)
      const draft: Draft = { random, loop, days: options.days, scenario: calmScenario(random, loop, options, stream) }
      buildCause(cause, draft, options)
      const { scenario } = draft
      const ms = (s: number) => scenario.startMs + Math.round(s * 1000)
      return {
        setup: loop.setup, scenario,
        truth: {
          tag: loop.setup.tag, cause, verdict: CAUSE_VERDICT[cause], facts: scenario.truth.facts,
          spans: scenario.truth.spans.map(s => ({ fromMs: ms(s.fromS), toMs: ms(s.toS) })), process: scenario.process, valve: scenario.valve,
        },
      }
    }
    catch (error) {
      if (!(error instanceof Redraw)) throw error
      if (error.message === 'slower') slower *= 1.6
      else if (error.message === 'quicker') slower /= 1.6
    }
  }
  throw new RangeError(`no draw of ${cause} on a ${type} loop came out visible (seed ${seed})`)
}

/** The loop at rest with its noise and a slow load, no cause yet. */
function calmScenario(random: SeededRandom, loop: DrawnLoop, options: DrawOptions, seed: number): LoopScenario {
  return {
    startMs: options.startMs ?? Date.UTC(2026, 10, 23), durationS: options.days * DAY, intervalS: loop.intervalS, stepS: loop.stepS,
    seed: mixSeed(seed, random.integer(1 << 30)), process: loop.process, workingPoint: loop.workingPoint,
    valve: { kind: 'sound' }, setpoint: { kind: 'constant', value: loop.workingPoint.pv }, cascade: false,
    loads: [{ kind: 'coloured', standardDeviation: 1, timeConstantS: loop.closedLoopS * (3 + 17 * random.uniform()), seed: random.integer(1 << 30) }],
    noise: loop.noise, resolution: 0, events: [], decimals: loop.decimals, compression: null,
    truth: { cause: 'healthy', spans: [], facts: {} },
  }
}
