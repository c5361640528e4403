/**
 * Dead band of a valve from a small-step test in manual: the output is raised in small steps until the process
 * variable answers, then lowered until it answers again.
 *
 * @param firstAnswerUp output, %, at which the process variable first moved while the output was raised
 * @param firstAnswerDown output, %, at which it first moved while the output was lowered afterwards
 * @param highest output, %, at which the direction was turned round; at least `firstAnswerUp`
 * @param step size of one step, %, above 0
 * @returns `deadBand`, %: output travel between the turn and the first answer; `uncertainty`, %: one
 *   step, because the answer came somewhere within the last one, so the true value is up to that much smaller
 * @throws RangeError when the figures cannot come from such a test
 * Source: common practice, no source; the definition (range through which the input is varied on reversal without
 * an observable change of the output) is that of ANSI/ISA-51.1, from memory.
 */
export function deadBand({ firstAnswerUp, firstAnswerDown, highest, step }: { firstAnswerUp: number, firstAnswerDown: number, highest: number, step: number }): { deadBand: number, uncertainty: number } {
  if (!(step > 0)) throw new RangeError(`The step must be above 0 %, not ${step}.`)
  if (highest < firstAnswerUp) throw new RangeError(`The highest output (${highest} %) is below the output at which the process variable first moved (${firstAnswerUp} %).`)
  if (firstAnswerDown > highest) throw new RangeError(`On the way down the output cannot exceed the highest (${highest} %).`)
  return { deadBand: highest - firstAnswerDown, uncertainty: step }
}
