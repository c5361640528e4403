import { describe, expect, it } from 'vitest'
import { OFF_NORMAL, prepareRecord } from '../../../shared/assessment/preparation/prepareRecord'
import { proofRecord } from '../../../shared/assessment/proof/proofRecord'
import { defaultSetup } from '../../../shared/assessment/defaultSetup'

const from = Date.UTC(2026, 10, 16)
const HOUR = 3_600_000
const setup = { ...defaultSetup('flow'), tag: 'F' }

/** Two hours at a minute: SP 50, PV 48 in even, 51 in odd minutes. */
function record(more: { mode?: (i: number) => number } = {}) {
  const n = 120
  const at = (f: (i: number) => number) => Float64Array.from({ length: n }, (_, i) => f(i))
  const mode = more.mode ? Uint8Array.from({ length: n }, (_, i) => more.mode!(i)) : null
  const raw = { t: at(i => from + i * 60_000), pv: at(i => (i % 2 ? 51 : 48)), sp: at(() => 50), op: at(() => 40), mode, modeNames: ['AUTO', 'MAN'] }
  return prepareRecord(raw, setup, { id: '', hourEdges: Float64Array.of(from, from + 2 * HOUR) })
}
const hours = [{ fromMs: from, letter: 'h' }, { fromMs: from + HOUR, letter: 's' }]

describe('proofRecord', () => {
  it('averages error, its size and its square over bins (closed form: error 2 and -1 in turn)', () => {
    const p = proofRecord(record(), { fromMs: from, toMs: from + 2 * HOUR }, hours, 600)
    expect(p.absolute).toHaveLength(12)
    expect([...p.absolute]).toEqual(Array(12).fill(1.5))
    expect([...p.error]).toEqual(Array(12).fill(0.5))
    expect([...p.square]).toEqual(Array(12).fill(2.5))
    expect([p.setpointMean, p.outputMean]).toEqual([50, 40])
    expect([...p.lostHours]).toEqual([1, 0])
  })
  it('leaves out time outside the normal modes and hours of an outage or a doubtful sensor', () => {
    const manual = proofRecord(record({ mode: i => (i < 30 ? 1 : 0) }), { fromMs: from, toMs: from + 2 * HOUR }, hours, 600)
    expect([...manual.absolute].map(v => Number.isNaN(v))).toEqual([true, true, true, ...Array(9).fill(false)])
    for (const letter of ['d', 'x', '.']) {
      const p = proofRecord(record(), { fromMs: from, toMs: from + 2 * HOUR }, [hours[0]!, { fromMs: from + HOUR, letter }], 600)
      expect([...p.absolute].filter(v => Number.isNaN(v))).toHaveLength(6)
      expect(p.lostHours[1]).toEqual(letter === 'x' ? 1 : NaN)
    }
  })
  it('counts only whole hours and whole bins of the window', () => {
    const p = proofRecord(record(), { fromMs: from + 15 * 60_000, toMs: from + 2 * HOUR }, hours, 600)
    expect(p.absolute).toHaveLength(10)
    expect(p.lostHours).toHaveLength(1)
  })
  it('gives empty bins where there is nothing, and refuses windows and bins that are none', () => {
    const p = proofRecord(record(), { fromMs: from + 5 * HOUR, toMs: from + 6 * HOUR }, [], 600)
    expect([...p.absolute].every(Number.isNaN)).toBe(true)
    expect(p.setpointMean).toBeNaN()
    expect(() => proofRecord(record(), { fromMs: from, toMs: from }, [], 600)).toThrow(/window/)
    expect(() => proofRecord(record(), { fromMs: from, toMs: from + HOUR }, [], 30)).toThrow(/bins/)
  })
  it('leaves its inputs alone', () => {
    const prepared = record({ mode: () => 1 })
    const copy = prepared.flags.slice()
    proofRecord(prepared, { fromMs: from, toMs: from + HOUR }, hours, 600)
    expect(prepared.flags).toEqual(copy)
    expect(prepared.flags[0]! & OFF_NORMAL).not.toBe(0)
  })
})
