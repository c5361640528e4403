/**
 * Switching cycle of an on-off loop: period between switchings on, duty, swing of PV.
 *
 * On: OP above the middle of its range. Medians over whole cycles; a cycle across a long gap does not count. Cost O(n).
 * Source: definition; against hysteresis, dead time and lag see the closed form of relay control (methods: on-off loops).
 *
 * @returns null below 3 whole cycles
 */
export function onOffCycle(op: Float64Array, pv: Float64Array, stretches: { begin: number, end: number }[], intervalS: number, middle: number): { periodS: number, swing: number, duty: number, cycles: number } | null {
  const periods: number[] = []
  const swings: number[] = []
  let on = 0
  let total = 0
  for (const s of stretches) {
    let started = -1
    let low = Infinity
    let high = -Infinity
    let was = NaN
    for (let i = s.begin; i < s.end; i++) {
      const u = op[i]
      if (u !== u) continue
      total++
      const now = u > middle ? 1 : 0
      on += now
      if (was === 0 && now === 1) {
        if (started >= 0) {
          periods.push((i - started) * intervalS)
          swings.push(high - low)
        }
        started = i
        low = Infinity
        high = -Infinity
      }
      was = now
      if (pv[i] < low) low = pv[i]
      if (pv[i] > high) high = pv[i]
    }
  }
  if (periods.length < 3) return null
  const median = (v: number[]) => v.sort((a, b) => a - b)[v.length >> 1]
  return { periodS: median(periods), swing: median(swings), duty: on / total, cycles: periods.length }
}
