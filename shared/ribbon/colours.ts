/**
 * Colours of the states, for places where CSS variables do not reach (canvas, mail, pictures). The style sheet has
 * the same values; a test holds them together and holds them apart under simulated colour vision deficiencies.
 */
import type { LedgerState } from '../assessment/types'

/** fill of a cell (null: the ground shows) and the ink of its pattern */
export interface StateColour { fill: string | null, mark: string }
export type Theme = 'light' | 'dark'

export const STATE_COLOURS: Readonly<Record<Theme, Readonly<Record<LedgerState, StateColour>>>> = {
  light: {
    steady: { fill: '#E1E7E3', mark: '#57616A' },
    manual: { fill: '#828D96', mark: '#FFFFFF' },
    saturated: { fill: '#A23F22', mark: '#FFFFFF' },
    hunting: { fill: '#552F98', mark: '#FFFFFF' },
    offTarget: { fill: '#D6A424', mark: '#3A2A00' },
    sensor: { fill: '#0C7BAE', mark: '#FFFFFF' },
    down: { fill: '#CECAC0', mark: '#6A665C' },
    noData: { fill: null, mark: '#7C858C' },
  },
  dark: {
    steady: { fill: '#2B3432', mark: '#9AA6AE' },
    manual: { fill: '#8A9FAD', mark: '#14181B' },
    saturated: { fill: '#CC5128', mark: '#14181B' },
    hunting: { fill: '#C8A6FC', mark: '#14181B' },
    offTarget: { fill: '#FBCF90', mark: '#14181B' },
    sensor: { fill: '#4A8CC4', mark: '#14181B' },
    down: { fill: '#43494B', mark: '#98A0A4' },
    noData: { fill: null, mark: '#79858C' },
  },
}
