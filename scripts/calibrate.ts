/**
 * npm run calibrate: simulates the training loops, fits the likelihood table of the verdicts and writes it to
 * shared/assessment/verdict/likelihoods.json, with the number of loops behind every weight.
 *
 * Seeds of the training set: FIRST_SEED upwards, fixed. `npm run accuracy` uses others. One loop in five is held out of the fit
 * and sets the temperature. Options for work on the method: --save FILE keeps the simulated figures, --from FILE starts from them.
 */
import { readFileSync, writeFileSync } from 'node:fs'
import { fileURLToPath } from 'node:url'
import { FEATURES, type FeatureName, type FeatureValues } from '../shared/assessment/verdict/gatherFeatures'
import { binOf, LIKELIHOODS, posteriorOf, type LikelihoodTable } from '../shared/assessment/verdict/likelihoods'
import { seededRandom } from '../shared/assessment/statistics/seededRandom'
import { CAUSE_VERDICT, type Cause } from '../shared/assessment/simulation/scenario'
import type { Verdict } from '../shared/assessment/types'
import { calibrateWindows } from './calibrateWindows'
import { LOOP_TYPES, runCases, type Case, type CaseResult } from './simulatedCases'

export const FIRST_SEED = 1_000_000
/** Loops of each cause and type. Limits, manual and dead sensors are counted, not inferred: their sound rest trains `steady`. */
const SEEDS: Partial<Record<Cause, number>> = {
  healthy: 44, tightTuning: 40, stickingValve: 50, carriedIn: 40, sluggish: 30, sensorNoisy: 14, sensorSpiky: 12, noiseDominated: 22,
  saturated: 5, leftInManual: 5, sensorFrozen: 5, sensorOutOfRange: 5,
}
/** The same for short pieces. */
const CROPPED_SEEDS: Partial<Record<Cause, number>> = { healthy: 16, tightTuning: 14, stickingValve: 24, carriedIn: 14, sluggish: 10, noiseDominated: 6 }
const CLASSES: Verdict[] = ['steady', 'huntingTuning', 'huntingValve', 'huntingExternal', 'sluggish', 'sensor', 'noise']
const COUNTED: Cause[] = ['saturated', 'leftInManual', 'sensorFrozen', 'sensorOutOfRange']
const BINS = 6
/** Figures whose strong values are rare: quantiles would drown them in the last bin. Round values, chosen beforehand. */
const FIXED_EDGES: Partial<Record<FeatureName, number[]>> = {
  slipShare: [0.02, 0.15, 0.3, 0.5], slipCount: [0.5, 1.5, 3.5, 10.5], standingTravel: [0.15, 0.25, 0.35, 0.45, 0.55], jumpShare: [0.35, 0.4, 0.45, 0.5, 0.55, 0.65],
  stickGain: [-0.1, -0.02, 0, 0.02, 0.05, 0.1], manualSwing: [0.1, 0.3, 0.6], setpointSwing: [0.01, 0.1, 0.5], wildShare: [1e-5, 1e-3, 1e-2],
}
/** Ridge on the weights, and on differences between neighbouring bins: both per training loop. */
const RIDGE = 0.0012
const SMOOTH = 0.004

const option = (name: string) => { const i = process.argv.indexOf(`--${name}`); return i > 0 ? process.argv[i + 1] : undefined }

async function trainingLoops(): Promise<CaseResult[]> {
  const from = option('from')
  if (from) return JSON.parse(readFileSync(from, 'utf8'), (_, v) => (v === 'NaN' ? NaN : v)) as CaseResult[]
  const cases: Case[] = []
  for (const [cause, seeds] of Object.entries(SEEDS) as [Cause, number][]) for (const type of LOOP_TYPES) for (let s = 0; s < seeds; s++) cases.push({ cause, type, seed: FIRST_SEED + s })
  for (const [cause, seeds] of Object.entries(CROPPED_SEEDS) as [Cause, number][]) for (const type of LOOP_TYPES) for (let s = 0; s < seeds; s++) cases.push({ cause, type, seed: FIRST_SEED + 500 + s, crop: true })
  const begin = performance.now()
  const results = await runCases(cases, 2, (done) => { if (done % 200 < 8) process.stdout.write(`\r${done} of ${cases.length} loops`) })
  process.stdout.write(`\r${results.length} of ${cases.length} loops in ${Math.round((performance.now() - begin) / 1000)} s\n`)
  const save = option('save')
  if (save) writeFileSync(save, JSON.stringify(results, (_, v) => (typeof v === 'number' && v !== v ? 'NaN' : v)))
  return results
}

/**
 * The same loop with a wider tolerance: its pattern and its cause stay, only the cost goes. Without these copies the table would take the
 * size against the tolerance for a cause, and pass over a sticking valve on a loop whose tolerance is generous.
 */
function withWiderTolerance(r: CaseResult): CaseResult | null {
  const verdict = CAUSE_VERDICT[r.cause]
  if (verdict === 'noise' || verdict === 'sensor' || r.seed % 2) return null
  const random = seededRandom(r.seed ^ 0x5f3759df)
  const k = Math.exp(Math.log(1.5) + random.uniform() * Math.log(verdict === 'sluggish' ? 2 : 6))
  const f = r.features
  return { ...r, features: { ...f, amplitudeOverTolerance: f.amplitudeOverTolerance / k, deviationOverTolerance: f.deviationOverTolerance / k, noiseOverTolerance: f.noiseOverTolerance / k, offTargetShare: k > 2 ? 0 : f.offTargetShare } }
}

const classOf = (r: CaseResult): number => CLASSES.indexOf(COUNTED.includes(r.cause) ? 'steady' : CAUSE_VERDICT[r.cause])
const heldOut = (r: CaseResult): boolean => r.seed % 5 === 0

function quantileEdges(values: number[]): number[] {
  const s = values.filter(v => v === v && Math.abs(v) !== Infinity).sort((a, b) => a - b)
  if (s.length < 30) return []
  const edges: number[] = []
  for (let k = 1; k < BINS; k++) {
    const e = Number(s[Math.floor((k / BINS) * s.length)].toPrecision(3))
    if (e > s[0] && e !== edges[edges.length - 1]) edges.push(e)
  }
  return edges
}

/** Multinomial logistic regression on the bins, Nesterov's accelerated gradient with a fixed step; convex, so the start does not matter. */
function fit(loops: CaseResult[]): LikelihoodTable {
  const K = CLASSES.length
  const edges = FEATURES.map(f => FIXED_EDGES[f] ?? quantileEdges(loops.map(r => r.features[f])))
  const offsets: number[] = []
  let size = K
  for (const e of edges) {
    offsets.push(size)
    size += (e.length + 2) * K
  }
  const bins = loops.map(r => Int32Array.from(FEATURES, (f, i) => offsets[i] + binOf(edges[i], r.features[f]) * K))
  const y = loops.map(classOf)
  const N = loops.length
  // every class weighs alike, whatever its number of loops
  const counts = CLASSES.map((_, c) => y.filter(v => v === c).length)
  const weight = y.map(c => N / K / counts[c])
  let w = new Float64Array(size)
  const v = new Float64Array(size)
  const step = 4 / (FEATURES.length + 1)
  for (let it = 0; it < 800; it++) {
    const g = new Float64Array(size)
    for (let n = 0; n < N; n++) {
      const s = new Float64Array(K)
      for (let c = 0; c < K; c++) s[c] = v[c]
      for (const b of bins[n]) for (let c = 0; c < K; c++) s[c] += v[b + c]
      const top = Math.max(...s)
      let sum = 0
      for (let c = 0; c < K; c++) sum += (s[c] = Math.exp(s[c] - top))
      for (let c = 0; c < K; c++) {
        const d = (weight[n] * (s[c] / sum - (c === y[n] ? 1 : 0))) / N
        g[c] += d
        for (const b of bins[n]) g[b + c] += d
      }
    }
    for (let i = 0; i < FEATURES.length; i++) {
      const rows = edges[i].length + 1
      for (let r = 0; r <= rows; r++) {
        for (let c = 0; c < K; c++) {
          const at = offsets[i] + r * K + c
          g[at] += RIDGE * v[at]
          if (r > 0 && r < rows) {
            const d = SMOOTH * (v[at] - v[at - K])
            g[at] += d
            g[at - K] -= d
          }
        }
      }
    }
    const next = new Float64Array(size)
    for (let i = 0; i < size; i++) next[i] = v[i] - step * g[i]
    const momentum = it / (it + 3)
    for (let i = 0; i < size; i++) v[i] = next[i] + momentum * (next[i] - w[i])
    w = next
  }
  const round = (x: number) => Number(x.toFixed(4))
  return {
    training: { command: 'npm run calibrate', firstSeed: FIRST_SEED, loops: N, heldOut: 0 },
    classes: CLASSES, base: Array.from(w.subarray(0, K), round), temperature: 1,
    features: FEATURES.map((name, i) => ({
      name, edges: edges[i],
      weights: Array.from({ length: edges[i].length + 2 }, (_, r) => Array.from(w.subarray(offsets[i] + r * K, offsets[i] + (r + 1) * K), round)),
      counts: Array.from({ length: edges[i].length + 2 }, (_, r) => CLASSES.map((_, c) => bins.filter((b, n) => y[n] === c && b[i] === offsets[i] + r * K).length)),
    })),
  }
}

function score(table: LikelihoodTable, loops: CaseResult[]): { loss: number, right: number } {
  let loss = 0
  let right = 0
  for (const r of loops) {
    const { probability } = posteriorOf(r.features as FeatureValues, table)
    const c = classOf(r)
    loss -= Math.log(probability[c]) / loops.length
    if (probability.indexOf(Math.max(...probability)) === c) right += 1 / loops.length
  }
  return { loss, right }
}

async function calibrateLoops(): Promise<LikelihoodTable> {
  const loops = (await trainingLoops()).flatMap((r) => { const wide = withWiderTolerance(r); return wide ? [r, wide] : [r] })
  const rest = loops.filter(heldOut)
  const table = fit(loops.filter(r => !heldOut(r)))
  table.training.heldOut = rest.length
  let best = Infinity
  for (let t = 0.5; t <= 3; t *= 1.03) {
    const { loss } = score({ ...table, temperature: t }, rest)
    if (loss < best) {
      best = loss
      table.temperature = Number(t.toFixed(3))
    }
  }
  const s = score(table, rest)
  console.log(`${table.training.loops} loops fitted; ${rest.length} held out: ${(100 * s.right).toFixed(1)} % right, log loss ${s.loss.toFixed(3)}, temperature ${table.temperature}`)
  for (const c of CLASSES) {
    const own = rest.filter(r => CLASSES[classOf(r)] === c)
    const said = own.map((r) => { const { probability } = posteriorOf(r.features as FeatureValues, table); return CLASSES[probability.indexOf(Math.max(...probability))] })
    console.log(c.padEnd(16), CLASSES.map(k => String(said.filter(v => v === k).length).padStart(5)).join(''))
  }
  const file = fileURLToPath(new URL('../shared/assessment/verdict/likelihoods.json', import.meta.url))
  const lines = table.features.map(f => `  ${JSON.stringify(f)}`).join(',\n')
  const { features: _, ...head } = table
  writeFileSync(file, `${JSON.stringify(head).slice(0, -1)},"features":[\n${lines}\n]}\n`)
  return table
}

if (process.argv.includes('--windows')) await calibrateWindows(LIKELIHOODS, option('from'), option('save'))
else await calibrateWindows(await calibrateLoops())
