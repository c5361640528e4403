import { assessLoopWeek } from '../../../shared/assessment/assessLoopWeek'
import { defaultSetup } from '../../../shared/assessment/defaultSetup'
import { seededRandom } from '../../../shared/assessment/statistics/seededRandom'
import type { LoopRecord, LoopType } from '../../../shared/assessment/types'
import { weekFrame } from '../../../shared/assessment/week/isoWeek'

const SAMPLES = 16_384
const TYPES: LoopType[] = ['flow', 'level', 'temperature', 'pressure']

/**
 * Assesses made-up loops and throws the answers away. The first loop-weeks in a fresh thread take ten times as long as later
 * ones, because the program is compiled while it runs; done while a file is still being read, that time costs nobody anything.
 */
export function rehearse(rounds: number): void {
  const random = seededRandom(1)
  const frame = weekFrame('2024-W02', 'UTC')
  for (let k = 0; k < rounds * TYPES.length; k++) {
    const type = TYPES[k % TYPES.length]
    const record = madeUp(frame.hourEdges[0], k, random.normal)
    assessLoopWeek(record, { ...defaultSetup(type), tag: '' }, frame, [])
  }
}

/** A PV that follows steps of its set point with an oscillation, a limit cycle or neither, an OP that answers, a while in manual. */
function madeUp(fromMs: number, k: number, normal: () => number): LoopRecord {
  const t = Float64Array.from({ length: SAMPLES }, (_, i) => fromMs + i * 10_000)
  const [sp, pv, op] = [0, 0, 0].map(() => new Float64Array(SAMPLES))
  const mode = new Uint8Array(SAMPLES)
  let slow = 0
  for (let i = 0; i < SAMPLES; i++) {
    slow = 0.98 * slow + 0.2 * normal()
    const phase = 2 * Math.PI * i / (24 + 13 * k)
    const swing = k % 3 === 0 ? 2 * Math.sin(phase) : k % 3 === 1 ? 1.5 * Math.sign(Math.sin(phase)) : 0
    sp[i] = 50 + 3 * (Math.floor(i / 4000) % 2)
    pv[i] = Math.round(100 * (sp[i] + swing + slow)) / 100
    op[i] = Math.round(10 * (45 - 1.5 * swing - 2 * slow)) / 10
    mode[i] = i % 8000 < 300 ? 1 : 0
  }
  return { t, pv, sp, op, mode, modeNames: ['AUTO', 'MAN'] }
}
