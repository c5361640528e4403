import { isLost, stateOfLetter } from './states'

/** Lost hours of ribbons within hours [from, to), and how many of the ribbons lost any there. */
export function lostBetween(ribbons: readonly string[], from: number, to: number): { hours: number, loops: number } {
  let hours = 0
  let loops = 0
  for (const ribbon of ribbons) {
    let own = 0
    for (let h = Math.max(0, from); h < Math.min(to, ribbon.length); h++) {
      const state = stateOfLetter(ribbon[h])
      if (state && isLost(state)) own++
    }
    hours += own
    if (own) loops++
  }
  return { hours, loops }
}
