/**
 * Whole-sample delay b of the process: an output written at sample t is first seen at sample t + b.
 *
 * b = floor(dead time / interval) + 1, the one sample being that of the hold; a dead time of exactly m intervals gives
 * m + 1.
 *
 * @param deadTimeS >= 0, s
 * @param intervalS > 0, s
 * @returns integer >= 1
 * @throws RangeError outside these ranges
 * Source: L. Desborough, T. Harris (1992) Performance assessment measures for univariate feedback control, Can. J.
 * Chem. Eng. 70:1186-1197 (delay includes the zero-order hold). Reference: closed form.
 */
export function delaySamples(deadTimeS: number, intervalS: number): number {
  if (!(deadTimeS >= 0) || !Number.isFinite(deadTimeS)) throw new RangeError(`dead time must be 0 or more, got ${deadTimeS}`)
  if (!(intervalS > 0) || !Number.isFinite(intervalS)) throw new RangeError(`interval must be above 0, got ${intervalS}`)
  // 0.3 / 0.1 is a little below 3 in binary
  return Math.floor(deadTimeS / intervalS + 1e-9) + 1
}
