import { isLost, stateOfLetter } from './states'

/** Hours [from, to) in which many loops of an area lost time at once. */
export interface CommonUpset { from: number, to: number, loops: number, lostHours: number }

/**
 * Stretches of hours in which at least half of an area's loops, and at least four, are in a lost state at once.
 * The share and the number are our own choice: fewer would call two troubled neighbours an upset of the area.
 * @returns largest first by lost hours; `loops`: most at once
 */
export function commonUpsets(ribbons: readonly string[], { share = 0.5, atLeast = 4 } = {}): CommonUpset[] {
  const hours = ribbons.reduce((n, r) => Math.max(n, r.length), 0)
  const count = new Uint32Array(hours)
  for (const ribbon of ribbons) for (let h = 0; h < ribbon.length; h++) {
    const state = stateOfLetter(ribbon[h])
    if (state && isLost(state)) count[h]++
  }
  const needed = Math.max(atLeast, share * ribbons.length)
  const upsets: CommonUpset[] = []
  for (let from = 0, to = 0; from < hours; from = to + 1) {
    to = from
    let lostHours = 0
    let loops = 0
    for (; to < hours && count[to] >= needed; to++) { lostHours += count[to]; loops = Math.max(loops, count[to]) }
    if (to > from) upsets.push({ from, to, loops, lostHours })
  }
  return upsets.sort((a, b) => b.lostHours - a.lostHours || a.from - b.from)
}
