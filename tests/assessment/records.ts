/** Hand-made records for the tests of the pipeline. */
import { defaultSetup } from '../../shared/assessment/defaultSetup'
import type { LoopRecord, LoopSetup, LoopType } from '../../shared/assessment/types'

/** A regular record; each signal a function of the sample's index, or null for "not in the record". */
export function makeRecord(options: {
  fromMs: number
  intervalS: number
  n: number
  pv: (i: number) => number
  sp?: ((i: number) => number) | null
  op?: ((i: number) => number) | null
  mode?: ((i: number) => string | null) | null
  skip?: (i: number) => boolean
}): LoopRecord {
  const kept = Array.from({ length: options.n }, (_, i) => i).filter(i => !options.skip?.(i))
  const signal = (f: ((i: number) => number) | null | undefined) => f ? Float64Array.from(kept, f) : null
  const modeNames = ['AUTO', 'MAN', 'CAS']
  return {
    t: Float64Array.from(kept, i => options.fromMs + Math.round(i * options.intervalS * 1000)),
    pv: signal(options.pv)!,
    sp: signal(options.sp === undefined ? () => 50 : options.sp),
    op: signal(options.op === undefined ? () => 40 : options.op),
    mode: options.mode ? Uint8Array.from(kept, i => { const m = options.mode!(i); return m === null ? 255 : modeNames.indexOf(m) }) : null,
    modeNames,
  }
}

export function makeSetup(type: LoopType = 'flow', change: Partial<LoopSetup> = {}): LoopSetup {
  return { tag: 'FIC-101', ...defaultSetup(type), normalModes: ['AUTO', 'CAS'], ...change }
}
