/** What stands on the desk and on every sheet, whatever is proposed. */
export const STANDING_CAUTIONS = [
  'Follow the site\'s management of change and permit to work; tell the operator before any test or change.',
  'Safety instrumented functions, interlocks and protective trips are out of scope.',
  'Moderate steps: change the gain or the integral time by at most a factor of 2 at a time, and watch the loop after each.',
  'Local codes, the equipment maker\'s limits and the judgement of qualified persons come first.',
  'Fettle never writes to a control system: what is decided here is carried there by a person.',
] as const

/** Where a test or a change is broken off; the engineer edits them for the loop at hand. */
export function usualStopCriteria(pvUnit: string, tolerance: number | null): string[] {
  return [
    tolerance ? `PV leaves SP by more than ${Number((5 * tolerance).toPrecision(2))} ${pvUnit}`.trim() : 'PV leaves the range agreed with the operator',
    'PV or OP swings with growing amplitude for more than two periods',
    'OP stays at a limit',
    'The operator asks for it, or an alarm of the unit comes up',
  ]
}
