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
import { SLIP_TABLE, type SlipTable } from './slipTable'

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

/** @param strokes second table, for short records; null: none. It speaks where strokes were looked for (`jumpSlips` or `bendSlips` is there) */
export function posteriorOf(values: FeatureValues, likelihoods: LikelihoodTable = LIKELIHOODS, strokes: SlipTable | null = likelihoods === LIKELIHOODS ? SLIP_TABLE : null): Posterior {
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
  const v = classes.indexOf('huntingValve')
  if (strokes && v >= 0 && (values.jumpSlips >= 0 || values.bendSlips >= 0)) {
    const rest = sum - e[v]
    const { base: level, scale } = values.regularity === values.regularity ? strokes.withRhythm : strokes.withoutRhythm
    let logit = level + scale * Math.log(e[v] / rest)
    // what the first table's figures still say about the valve, against the other causes
    for (const f of contributions) {
      let other = 0
      f.perClass.forEach((w, c) => { if (c !== v) other += (e[c] / rest) * w })
      f.perClass[v] = other + scale * (f.perClass[v] - other)
    }
    for (const f of strokes.features) {
      const bin = binOf(f.edges, values[f.name])
      logit += f.weights[bin]
      contributions.push({ name: f.name, bin, edges: f.edges, perClass: classes.map((_, c) => (c === v ? f.weights[bin] : 0)) })
    }
    // the others keep their proportions, and the sum stays as it was
    const p = 1 / (1 + Math.exp(-logit))
    for (let c = 0; c < e.length; c++) e[c] = c === v ? p * sum : (e[c] / rest) * (1 - p) * sum
  }
  const floor = (1 - SUREST) / (classes.length - 1)
  // a little of the probability always stays with the others
  const probability = e.map(v => floor + (v / sum) * (SUREST - floor))
  return { classes, probability, contributions }
}
