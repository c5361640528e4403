/**
 * What each role does next, by verdict. Short, and never an order to touch the plant without the site's own rules.
 * Source: common practice, no source.
 */
import type { Verdict } from '../types'

export interface NextActions { operator: string, technician: string, engineer: string }

export const NEXT_ACTIONS: Readonly<Record<Verdict, NextActions>> = {
  steady: {
    operator: 'Nothing to do. Leave the loop in its normal mode.',
    technician: 'Nothing to do.',
    engineer: 'Nothing to do. Its figures serve as the reference for later weeks.',
  },
  huntingTuning: {
    operator: 'Tell the engineer when the hunting began and what changed then. Do not swing the set point to calm it.',
    technician: 'Confirm that range, filter and tuning in the controller match the record.',
    engineer: 'Open the tuning desk: check the dead time, compare a calmer tuning, change it under management of change.',
  },
  huntingValve: {
    operator: 'Agree with the technician on a time for a valve check. Manual for a short while shows whether the swing stops.',
    technician: 'Under permit: small steps of the output, note when the stem moves. Check packing, positioner, air supply, linkage.',
    engineer: 'Do not retune to hide it. Order the valve check, and compare before and after.',
  },
  huntingExternal: {
    operator: 'Look upstream for the same rhythm. Note batches, switching pumps or compressors.',
    technician: 'No work on this loop yet. Check the likely source first.',
    engineer: 'Open the group of loops with this period and start at the likely source. Retuning here will not cure it.',
  },
  sluggish: {
    operator: 'Tell the engineer how long the loop needs to recover after a load change.',
    technician: 'Confirm that tuning and filter in the controller match the record.',
    engineer: 'Open the tuning desk: raise the gain or shorten the integral time in moderate steps, under management of change.',
  },
  saturated: {
    operator: 'See whether the set point can be reached at all with the present load. Report bypasses and limits in force.',
    technician: 'Check that the valve or drive reaches its full stroke, and that the output limits are as recorded.',
    engineer: 'Tuning cannot help at a limit. Check sizing, output limits, and the set point.',
  },
  manual: {
    operator: 'Say why the loop is in manual, then return it to its normal mode if nothing stands against it.',
    technician: 'Ask the operators what stops them from using the loop. Check sensor and valve for it.',
    engineer: 'Find the reason for manual with the operators. Cure the reason before asking for the normal mode.',
  },
  sensor: {
    operator: 'Do not trust this reading. Compare with another measurement, and tell maintenance.',
    technician: 'Check the transmitter, wiring, impulse line or thermocouple, and its range in the control system.',
    engineer: 'Withhold judgement of control until the measurement is right again.',
  },
  noise: {
    operator: 'Nothing urgent. Report if the valve is heard working all the time.',
    technician: 'Look for the cause of the noise: earthing, mounting, bubbling, a loose wire.',
    engineer: 'Filter in measure, lower gain or derivative action. The filter adds lag: check the margins.',
  },
  cannotTell: {
    operator: 'Nothing to do for now.',
    technician: 'Nothing to do for now.',
    engineer: 'Get better data, as the reason says, then assess again.',
  },
}
