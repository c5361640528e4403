/**
 * The second table of the verdicts (`shared/assessment/verdict/slipTable.json`), for short records: simulates the training windows, fits, writes. Used by
 * calibrate.ts; not a command of its own.
 *
 * Seeds FIRST_WINDOW_SEED upwards, fixed; `npm run accuracy -- --windows` uses others. Windows whose valve only has backlash are neither sticking nor
 * sound, and windows on which the inference never speaks (too slow, thinned, too short) are left out. One window in five is held out and reported on.
 */
import { readFileSync, writeFileSync } from 'node:fs'
import { fileURLToPath } from 'node:url'
import { WINDOW_CONDITIONS, WINDOW_TYPES } from '../shared/assessment/simulation/drawShortWindow'
import { SHORT_FEATURES, type FeatureName, type FeatureValues } from '../shared/assessment/verdict/gatherFeatures'
import { binOf, posteriorOf, type LikelihoodTable } from '../shared/assessment/verdict/likelihoods'
import type { SlipTable } from '../shared/assessment/verdict/slipTable'
import { runCases, type Case, type CaseResult } from './simulatedCases'

export const FIRST_WINDOW_SEED = 8_000_000
const SEEDS = 60
/** Round values, chosen beforehand. */
const EDGES: Record<typeof SHORT_FEATURES[number], number[]> = {
  jumpSlips: [0.5, 1.5, 2.5, 4.5], jumpSlipShare: [0.01, 0.34, 0.6, 0.9], jumpTravel: [0.25, 0.5, 1, 2, 4], jumpFollow: [-0.5, -0.2, 0, 0.15, 0.25], jumpStandGain: [-0.5, -0.15, 0, 0.15, 0.3, 0.5],
  jumpOffset: [0.05, 0.15, 0.3, 0.6, 1], jumpSize: [1.2, 1.6, 2.2, 4],
  bendSlips: [0.5, 1.5, 2.5], bendSlipShare: [0.01, 0.34, 0.6, 0.9], bendFollow: [-0.3, 0, 0.2], bendOffset: [0.4, 0.8, 1.2], bendSize: [1.2, 1.6, 2.2], runGain: [0.05, 0.2, 0.5, 1, 1.8], runExplained: [0.2, 0.5, 0.7, 0.85],
}
/** As in calibrate.ts. */
const RIDGE = 0.002
const SMOOTH = 0.004

/** @param first table that gives p0 @param from file of windows simulated before @param save file to keep them in */
export async function calibrateWindows(first: LikelihoodTable, from?: string, save?: string): Promise<void> {
  const windows = (from ? JSON.parse(readFileSync(from, 'utf8'), (_, v) => (v === 'NaN' ? NaN : v)) as CaseResult[] : await simulate())
  if (save) writeFileSync(save, JSON.stringify(windows, (_, v) => (typeof v === 'number' && v !== v ? 'NaN' : v)))
  const used = windows.filter(r => r.window !== 'backlash' && !/settling horizons/.test(r.reason) && (r.features.jumpSlips >= 0 || r.features.bendSlips >= 0))
  const held = used.filter(r => r.seed % 5 === 0)
  const table = fit(used.filter(r => r.seed % 5 !== 0), first)
  table.training.heldOut = held.length
  let loss = 0
  let found = 0
  let accused = 0
  const sticking = held.filter(isSticking).length
  for (const r of held) {
    const { probability, classes } = posteriorOf(r.features as FeatureValues, first, table)
    const p = probability[classes.indexOf('huntingValve')]
    loss -= Math.log(isSticking(r) ? p : 1 - p) / held.length
    if (p >= 0.65) { if (isSticking(r)) found++; else accused++ }
  }
  console.log(`${table.training.windows} windows fitted; ${held.length} held out: log loss ${loss.toFixed(3)}; at 0.65 ${found} of ${sticking} sticking valves found, ${accused} of ${held.length - sticking} sound ones accused`)
  const { features, ...head } = table
  const file = fileURLToPath(new URL('../shared/assessment/verdict/slipTable.json', import.meta.url))
  writeFileSync(file, `${JSON.stringify(head).slice(0, -1)},"features":[\n${features.map(f => `  ${JSON.stringify(f)}`).join(',\n')}\n]}\n`)
}

const isSticking = (r: CaseResult): boolean => r.truth === 'huntingValve'

async function simulate(): Promise<CaseResult[]> {
  const cases: Case[] = WINDOW_CONDITIONS.flatMap(window => window === 'backlash' ? [] : WINDOW_TYPES.flatMap(type => Array.from({ length: SEEDS }, (_, s) => ({ cause: 'healthy' as const, window, type, seed: FIRST_WINDOW_SEED + s }))))
  const results = await runCases(cases, 2, (done) => { if (done % 400 < 8) process.stdout.write(`\r${done} of ${cases.length} windows`) })
  process.stdout.write(`\r${results.length} windows simulated\n`)
  return results
}

/** Logistic regression with the first table's logit given; Nesterov's accelerated gradient with a fixed step; convex. */
function fit(windows: CaseResult[], first: LikelihoodTable): SlipTable {
  const names = [...SHORT_FEATURES]
  const N = windows.length
  const logit = windows.map((r) => {
    const { probability, classes } = posteriorOf(r.features as FeatureValues, first, null)
    const p = probability[classes.indexOf('huntingValve')]
    return Math.log(p / (1 - p))
  })
  // 0, 1: base and scale without a rhythm; 2, 3: with one
  const part = windows.map(r => (r.features.regularity === r.features.regularity ? 2 : 0))
  const offsets: number[] = []
  let size = 4
  for (const n of names) {
    offsets.push(size)
    size += EDGES[n].length + 2
  }
  const bins = windows.map(r => names.map((n, i) => offsets[i] + binOf(EDGES[n], r.features[n])))
  const y = windows.map(r => (isSticking(r) ? 1 : 0))
  let w = new Float64Array(size)
  const v = new Float64Array(size)
  const step = 4 / (names.length + 5)
  for (let it = 0; it < 3000; it++) {
    const g = new Float64Array(size)
    for (let n = 0; n < N; n++) {
      const k = part[n]
      let s = v[k] + (1 + v[k + 1]) * logit[n]
      for (const b of bins[n]) s += v[b]
      const d = (1 / (1 + Math.exp(-s)) - y[n]) / N
      g[k] += d
      g[k + 1] += d * logit[n]
      for (const b of bins[n]) g[b] += d
    }
    for (let i = 0; i < names.length; i++) {
      const rows = EDGES[names[i]].length + 1
      for (let r = 0; r <= rows; r++) {
        const at = offsets[i] + r
        g[at] += RIDGE * v[at]
        if (r > 0 && r < rows) {
          const d = SMOOTH * (v[at] - v[at - 1])
          g[at] += d
          g[at - 1] -= d
        }
      }
    }
    for (const k of [1, 3]) g[k] = 0.1 * (g[k] + RIDGE * v[k])
    const next = new Float64Array(size)
    const momentum = it / (it + 3)
    for (let i = 0; i < size; i++) {
      next[i] = v[i] - step * g[i]
      v[i] = next[i] + momentum * (next[i] - w[i])
    }
    w = next
  }
  const round = (x: number) => Number(x.toFixed(4))
  const table: SlipTable = {
    training: { command: 'npm run calibrate -- --windows', firstSeed: FIRST_WINDOW_SEED, windows: N, heldOut: 0 },
    withoutRhythm: { base: round(w[0]), scale: round(1 + w[1]) }, withRhythm: { base: round(w[2]), scale: round(1 + w[3]) },
    features: names.map((name, i) => ({
      name: name as FeatureName, edges: EDGES[name],
      weights: Array.from(w.subarray(offsets[i], offsets[i] + EDGES[name].length + 2), round),
      counts: Array.from({ length: EDGES[name].length + 2 }, (_, r) => [1, 0].map(c => bins.filter((b, n) => y[n] === c && b[i] === offsets[i] + r).length)),
    })),
  }
  return table
}
