/** Sentences built from figures: pieces of text, the strong ones carry the figure. */
import type { FleetGroup, FleetSummary } from '../types/fleet'
import type { PlantAnswer } from '../types/plant'
import { STATES } from '../ribbon/states'
import { formatDuration } from './duration'
import { formatHourOfWeek } from './date'
import { formatCount } from './number'
import { counted, opening } from './words'

export interface Piece { text: string, strong?: boolean, to?: string }

/** A figure and its unit stay on one line. */
const together = (text: string): string => text.replace(/(\d) (h|d|min|s|loop-hours?)\b/g, '$1\u00A0$2')
const strong = (text: string, to?: string): Piece => ({ text: together(text), strong: true, ...(to ? { to } : {}) })
const plain = (text: string): Piece => ({ text: together(text) })

const moreOrFewer = (change: number): string =>
  change === 0 ? 'as many as the week before' : `${formatCount(Math.abs(change))} ${change > 0 ? 'more' : 'fewer'} than the week before`

/** What matters in the fleet as it is filtered: how many lost much, who hunts together. */
export function fleetSentence(summary: FleetSummary, groups: FleetGroup[], filtered: boolean): Piece[] {
  const { loops, overTwenty, lostHours } = summary
  const whom = filtered ? `${counted(loops, 'loop')} shown` : counted(loops, 'loop')
  const against = summary.change === null ? '' : `, ${moreOrFewer(summary.change)}`
  const pieces: Piece[] = overTwenty > 0
    ? [strong(`${formatCount(overTwenty)} of ${whom}`), plain(` lost more than 20 hours; all together lost `), strong(`${formatCount(lostHours)} h`), plain(`${against}.`)]
    : lostHours > 0
      ? [plain(`None of ${whom} lost more than 20 hours; together they lost `), strong(`${formatCount(lostHours)} h`), plain(`${against}.`)]
      : [strong('No hour was lost'), plain(` by the ${whom}.`)]
  const largest = groups[0]
  if (!filtered && largest && largest.members > 1) {
    pieces.push(plain(` ${opening(largest.members)} hunt together with a period of `), strong(formatDuration(largest.period)))
    if (largest.likelySource) pieces.push(plain('; the likely source is '), strong(largest.likelySource, `/loops/${encodeURIComponent(largest.likelySource)}`))
    pieces.push(plain('.'))
    if (groups.length > 1) pieces.push(plain(` ${opening(groups.length - 1)} more ${groups.length === 2 ? 'group does' : 'groups do'} so.`))
  }
  return pieces
}

/** What matters in the plant: how much was lost, to what, where, and whether many lost it at once. */
export function plantSentence(plant: PlantAnswer, zone: string): Piece[] {
  const week = `week ${Number(plant.week.slice(6))}`
  if (plant.lostHours === 0) return [strong('No loop-hour was lost'), plain(` in ${week} by ${counted(plant.loops, 'loop')}.`)]
  const pieces: Piece[] = [plain(`In ${week} the plant lost `), strong(`${formatCount(plant.lostHours)} loop-hours`)]
  if (plant.change !== null) pieces.push(plain(`, ${moreOrFewer(plant.change)}`))
  const state = STATES.filter(s => s.lost).reduce((a, b) => (plant.hours[b.state] > plant.hours[a.state] ? b : a))
  const area = plant.areas.reduce((a, b) => (b.lostHours > a.lostHours ? b : a))
  pieces.push(plain('. Most went to '), strong(state.label), plain(` (${formatCount(plant.hours[state.state])} h)`))
  if (plant.areas.length > 1) pieces.push(plain(', most of all in '), strong(area.area || 'loops without an area'), plain(` (${formatCount(area.lostHours)} h)`))
  pieces.push(plain('.'))
  const upset = plant.areas.flatMap(a => a.upsets.map(u => ({ ...u, area: a.area, size: a.loops }))).sort((a, b) => b.lostHours - a.lostHours)[0]
  if (upset) pieces.push(plain(' In '), strong(upset.area || 'loops without an area'), plain(`, ${formatCount(upset.loops)} of ${counted(upset.size, 'loop')} were upset at once from ${formatHourOfWeek(plant.week, upset.from, zone).replace(/ to .*/, '')}${upset.to - upset.from > 1 ? ` for ${upset.to - upset.from} h` : ''}.`))
  return pieces
}
