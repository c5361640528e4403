/**
 * What goes on at Tarn Hollow Tileworks in the three demo weeks. Days count from the first Monday 00:00; the text is for
 * people who look at the demo, the cause is what the simulator builds in. Loops without a line are drawn, four in five healthy.
 */
import type { Cause } from '../../../shared/assessment/simulation/scenario'

export interface Story {
  cause: Cause
  text: string
  /** day on which it begins; left out: from the start */
  fromDay?: number
  /** day on which it ends, by repair, retuning or return to automatic; left out: lasts */
  toDay?: number
  /** hunts at all hours; without it most loops do so at certain hours or days only */
  always?: boolean
}

/** The sticking feed-water valve, and who hunts with it: each reached with its delay in s. */
export const GROUP = {
  source: 'FIC-312',
  members: { 'PIC-331': 8, 'PIC-313': 25, 'PIC-323': 40, 'TIC-336': 30, 'AIC-315': 45, 'FIC-335': 15 } as Record<string, number>,
}

/** primary -> secondary */
export const CASCADES: Readonly<Record<string, string>> = { 'LIC-321': 'FIC-322', 'TIC-251': 'FIC-252', 'TIC-811': 'FIC-812', 'TIC-821': 'FIC-822' }

export const STORIES: Readonly<Record<string, Story>> = {
  'FIC-312': { cause: 'stickingValve', text: 'The feed water valve of boiler 1 sticks at high fire in the afternoons; the header and half the boiler house hunt with it.' },
  'PIC-337': { cause: 'stickingValve', text: 'Let-down valve stuck in week 1; packing adjusted and positioner checked on Tuesday of week 2.', toDay: 8.42 },
  'FIC-473': { cause: 'stickingValve', text: 'Dosing valve of mill 3, coated with slip.', always: true },
  'TIC-2402': { cause: 'stickingValve', text: 'Damper of dryer 4 moves in jumps.' },
  'LIC-753': { cause: 'stickingValve', text: 'Effluent valve sticks; the sump level swings slowly.' },
  'PIC-551': { cause: 'stickingValve', text: 'Press 5 pressure valve sticks.' },
  'TIC-1208': { cause: 'tightTuning', text: 'Zone 8 of kiln 2 was retuned on the second Sunday and has hunted since.', fromDay: 13.6 },
  'FIC-1123': { cause: 'tightTuning', text: 'Combustion air of kiln 1: gain far too high.' },
  'LIC-332': { cause: 'tightTuning', text: 'Deaerator level: integral time of a flow loop.' },
  'TIC-843': { cause: 'tightTuning', text: 'Hot water circuit 3 hunted until it was retuned on Thursday of week 2.', toDay: 10.6 },
  'PIC-641': { cause: 'tightTuning', text: 'Instrument air header cycles with its compressor.' },
  'AIC-751': { cause: 'sluggish', text: 'Neutralisation answers upsets for hours.' },
  'TIC-2202': { cause: 'sluggish', text: 'Dryer 2 drags behind after every change of load.' },
  'TIC-1304': { cause: 'sluggish', text: 'Preheat zone 4 of kiln 3 detuned after an old burner trouble.' },
  'TIC-2101': { cause: 'saturated', text: 'Steam valve of dryer 1 stands wide open: undersized since the tile format changed.', fromDay: 1.3 },
  'PIC-713': { cause: 'saturated', text: 'Pump of tower 1 at full speed while the strainer is blocked.', fromDay: 7.3, toDay: 17.5 },
  'TIC-1305': { cause: 'leftInManual', text: 'Zone 5 of kiln 3 put in manual on Thursday of week 1 and forgotten.', fromDay: 3.6 },
  'FIC-463': { cause: 'leftInManual', text: 'Operators run the flow of glaze line 6 by hand at night shift and leave it so.', fromDay: 0.9, toDay: 12.3 },
  'AIC-258': { cause: 'leftInManual', text: 'Powder moisture in manual since the analyser was cleaned.', fromDay: 9.4 },
  'TIC-1112': { cause: 'sensorFrozen', text: 'Thermocouple card of kiln 1 zone 12 hangs from Monday of week 2 on.', fromDay: 7.2, toDay: 16.4 },
  'TIC-533': { cause: 'sensorOutOfRange', text: 'Broken thermocouple in the die of press 3.', fromDay: 4.5, toDay: 8.6 },
  'TIC-1209': { cause: 'sensorNoisy', text: 'Loose compensating cable, kiln 2 zone 9.', fromDay: 12.1 },
  'AIC-704': { cause: 'sensorSpiky', text: 'Bubbles at the pH electrode.', fromDay: 5.5 },
  'LIC-421': { cause: 'noiseDominated', text: 'Agitator splashes at the level probe of glaze tank 2.' },
  'FIC-255': { cause: 'noiseDominated', text: 'Slip flow meter unfiltered behind the piston pump.' },
  'AIC-341': { cause: 'compressed', text: 'Archived with a wide exception band.' },
  'TIC-1211': { cause: 'compressed', text: 'Archived with a wide exception band.' },
  'TIC-841': { cause: 'carriedIn', text: 'The network outside swings with the neighbour works from week 2 on.', fromDay: 7 },
  'PIC-1121': { cause: 'carriedIn', text: 'The stack draught pulses with the exhaust fan of kiln 2.' },
}

export const OUTAGE = { area: 'Presses', fromDay: 9 + 6 / 24, toDay: 9 + 16 / 24, reason: 'Planned stop of the presses for die change and oil service' }

/** Loops on which the set point was stepped on purpose, and the days on which that began. */
export const BUMP_TESTS: Readonly<Record<string, number[]>> = { 'TIC-1304': [15.3, 18.3], 'TIC-843': [15.3, 18.3] }
