/**
 * Second table, for short records only: how much the single strokes that are seen add to, or take from, the evidence for a sticking valve.
 *
 * logit p = base + scale x logit p0 + sum of the weights of the bins, p0 from the first table (`likelihoods`), base and scale by whether a rhythm was found:
 * without one the first table has little to say about a valve. So what it has weighed already is not weighed twice: the weights are fitted, as a regularised logistic regression, on simulated short windows with p0 given. A weight is the natural
 * logarithm of the likelihood ratio that the figure adds. The other causes share what is left in their old proportions.
 * `npm run calibrate -- --windows` makes it; nothing in it comes from real records.
 * Source: weights of evidence, I. J. Good 1950; stacking, D. H. Wolpert 1992, Stacked generalization.
 */
import table from './slipTable.json'
import type { FeatureName } from './gatherFeatures'

export interface SlipTable {
  training: { command: string, firstSeed: number, windows: number, heldOut: number }
  withoutRhythm: { base: number, scale: number }
  withRhythm: { base: number, scale: number }
  features: {
    name: FeatureName
    /** as in `LikelihoodTable` */
    edges: number[]
    /** [bin], for a sticking valve */
    weights: number[]
    /** [bin][sticking, other]: training windows */
    counts: number[][]
  }[]
}

export const SLIP_TABLE = table as unknown as SlipTable
