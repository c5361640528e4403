/**
 * From the figures of a loop-week to the probability of each cause.
 *
 * Every figure falls into one of a few bins, or into "not there". Each bin carries a weight for each cause; the weights of a cause add up,
 * and the softmax of the sums is the probability. The weights are a regularised multinomial logistic fit on simulated loops, so figures that say
 * the same thing share their say instead of counting twice, as plain products of likelihood ratios would. Beside each weight stands the
 * number of training loops behind it. `npm run calibrate` makes the table; nothing in it comes from real records.
 * Source: logistic regression on binned features (weights of evidence), I. J. Good 1950, Probability and the weighing of evidence;
 * temperature scaling, C. Guo and others 2017, On calibration of modern neural networks.
 */
import table from './likelihoods.json'
import type { Verdict } from '../types'
import type { FeatureName, FeatureValues } from './gatherFeatures'

export interface LikelihoodTable {
  /** how it was made: command, seeds, number of loops */
  training: { command: string, firstSeed: number, loops: number, heldOut: number }
  classes: Verdict[]
  /** intercept of each cause */
  base: number[]
  /** sums are divided by this before the softmax; from the held-out part */
  temperature: number
  features: {
    name: FeatureName
    /** inner edges, ascending; bin k holds edges[k-1] <= x < edges[k]; the last bin is "not there" */
    edges: number[]
    /** [bin][class] */
    weights: number[][]
    /** training loops of each class in the bin */
    counts: number[][]
  }[]
}

export const LIKELIHOODS = table as unknown as LikelihoodTable

/** Bin of a value; the last is "not there". */
export function binOf(edges: readonly number[], x: number): number {
  if (x !== x) return edges.length + 1
  let k = 0
  while (k < edges.length && x >= edges[k]) k++
  return k
}

export interface Posterior {
  classes: Verdict[]
  probability: number[]
  /** [feature][class], already divided by the temperature */
  contributions: { name: FeatureName, bin: number, edges: number[], perClass: number[] }[]
}

/** Loops differ from simulated ones in ways no table knows: no cause is ever surer than this (ours). */
const SUREST = 0.97

export function posteriorOf(values: FeatureValues, likelihoods: LikelihoodTable = LIKELIHOODS): Posterior {
  const { classes, base, temperature, features } = likelihoods
  const score = base.map(b => b / temperature)
  const contributions = features.map((f) => {
    const bin = binOf(f.edges, values[f.name])
    const perClass = f.weights[bin].map(w => w / temperature)
    perClass.forEach((w, c) => { score[c] += w })
    return { name: f.name, bin, edges: f.edges, perClass }
  })
  const top = Math.max(...score)
  const e = score.map(s => Math.exp(s - top))
  const sum = e.reduce((a, b) => a + b, 0)
  const floor = (1 - SUREST) / (classes.length - 1)
  // a little of the probability always stays with the others
  const probability = e.map(v => floor + (v / sum) * (SUREST - floor))
  return { classes, probability, contributions }
}
