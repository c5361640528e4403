import { describe, expect, it } from 'vitest'
import { fleetSentence, plantSentence } from '../../shared/format/sentence'
import { noHours } from '../../shared/ribbon/states'
import type { FleetSummary } from '../../shared/types/fleet'
import type { PlantAnswer } from '../../shared/types/plant'

const text = (pieces: { text: string }[]) => pieces.map(p => p.text).join('').replaceAll('\u00A0', ' ')
const summary = (over: Partial<FleetSummary>): FleetSummary => ({ loops: 238, lostHours: 531, change: -47, hours: noHours(), overTwenty: 14, setAside: 0, ...over })

describe('fleetSentence', () => {
  it('says how many lost much and who hunts together', () => {
    expect(text(fleetSentence(summary({}), [{ letter: 'A', period: 2280, members: 9, likelySource: 'FIC-2107' }], false)))
      .toBe('14 of 238 loops lost more than 20 hours; all together lost 531 h, 47 fewer than the week before. Nine hunt together with a period of 38 min; the likely source is FIC-2107.')
  })
  it('does not call calm what it has not seen: none above 20 h still lost hours', () => {
    expect(text(fleetSentence(summary({ overTwenty: 0 }), [], false))).toBe('None of 238 loops lost more than 20 hours; together they lost 531 h, 47 fewer than the week before.')
    expect(text(fleetSentence(summary({ overTwenty: 0, lostHours: 0, loops: 1 }), [], true))).toBe('No hour was lost by the 1 loop shown.')
  })
  it('names no source where there is none, and counts further groups', () => {
    const g = (letter: string, members: number) => ({ letter, period: 600, members, likelySource: null })
    expect(text(fleetSentence(summary({}), [g('A', 3), g('B', 2)], false))).toContain('Three hunt together with a period of 10 min. One more group does so.')
    expect(text(fleetSentence(summary({}), [g('A', 3)], true))).not.toContain('hunt together')
  })
  it('compares with the week before only where there was one', () => {
    expect(text(fleetSentence(summary({ change: null }), [], false))).toBe('14 of 238 loops lost more than 20 hours; all together lost 531 h.')
    expect(text(fleetSentence(summary({ change: 0 }), [], false))).toContain('531 h, as many as the week before.')
  })
})

describe('plantSentence', () => {
  const area = (name: string, lostHours: number, upsets: PlantAnswer['areas'][number]['upsets'] = []) => ({ area: name, loops: 30, hours: noHours(), lostHours, weightedLostHours: 0, change: 0, ribbons: [], upsets })
  const plant: PlantAnswer = {
    week: '2026-W47', loops: 60, missing: 0, hours: { ...noHours(), hunting: 300, manual: 100 }, lostHours: 400, change: -20, hoursChange: null,
    areas: [area('Kilns', 250, [{ from: 62, to: 66, loops: 24, lostHours: 90 }]), area('Dryers', 150)], groups: [], tickets: [], openTickets: 0,
  }
  it('says how much, to what, where, and what was common', () => {
    expect(text(plantSentence(plant, 'Europe/Berlin'))).toBe('In week 47 the plant lost 400 loop-hours, 20 fewer than the week before. Most went to hunting (300 h), most of all in Kilns (250 h). In Kilns, 24 of 30 loops were upset at once from Wed 18 Nov, 14:00 for 4 h.')
  })
  it('a week without lost hours', () => {
    expect(text(plantSentence({ ...plant, lostHours: 0, areas: [] }, 'UTC'))).toBe('No loop-hour was lost in week 47 by 60 loops.')
  })
})
