/**
 * How right the verdicts are on short windows (750 samples at 10 s) that the calibration has not seen, as Markdown. Used by accuracy.ts (`--windows`);
 * not a command of its own. 1,020 windows: 17 conditions, 4 loop types, seeds from FIRST_WINDOW_SEED upwards.
 */
import { readFileSync, writeFileSync } from 'node:fs'
import { WINDOW_CONDITIONS, WINDOW_TYPES } from '../shared/assessment/simulation/drawShortWindow'
import type { FeatureValues } from '../shared/assessment/verdict/gatherFeatures'
import { posteriorOf } from '../shared/assessment/verdict/likelihoods'
import { runCases, type Case, type CaseResult } from './simulatedCases'

// Never looked at while rules were written: take a new one after wrong cases of this set were looked at.
export const FIRST_WINDOW_SEED = 9_000_000

const percent = (part: number, whole: number): string => (whole > 0 ? `${(100 * part / whole).toFixed(1)} %` : '-')
const cell = (list: CaseResult[], is: (r: CaseResult) => boolean): string => list.length ? `${list.filter(is).length}/${list.length}` : '-'

export async function windowAccuracy(options: { seeds?: number, firstSeed?: number, from?: string, save?: string, wrong?: boolean }): Promise<string> {
  const seeds = options.seeds ?? 15
  const firstSeed = options.firstSeed ?? FIRST_WINDOW_SEED
  const cases: Case[] = WINDOW_CONDITIONS.flatMap(window => WINDOW_TYPES.flatMap(type => Array.from({ length: seeds }, (_, s) => ({ cause: 'healthy' as const, window, type, seed: firstSeed + s }))))
  const results = options.from
    ? JSON.parse(readFileSync(options.from, 'utf8'), (_, v) => (v === 'NaN' ? NaN : v)) as CaseResult[]
    : await runCases(cases, 2, (done) => { if (done % 200 < 8) process.stdout.write(`\r${done} of ${cases.length} windows`) })
  if (options.save) writeFileSync(options.save, JSON.stringify(results, (_, v) => (typeof v === 'number' && v !== v ? 'NaN' : v)))

  const named = (r: CaseResult) => r.verdict === 'huntingValve'
  const silent = (r: CaseResult) => r.verdict === 'cannotTell'
  const sticking = results.filter(r => r.truth === 'huntingValve')
  const backlash = results.filter(r => r.window === 'backlash')
  const sound = results.filter(r => r.truth !== 'huntingValve' && r.window !== 'backlash')
  const short = results.filter(r => r.type !== 'temperature')
  const accused = sound.filter(named)
  const all = [...sticking, ...sound]
  const lines: string[] = []
  const say = (...l: string[]) => lines.push(...l)
  say(`Made by \`npm run accuracy -- --windows\`: ${results.length} simulated windows of 750 samples at 10 s that the calibration has not seen (seeds from ${firstSeed}): four conditions with a sticking valve by the three published models, twelve with a sound one, one with backlash only, each on four loop types. A quarter and more of them are recorded coarsely (few decimals, coarse transmitter, light compression). Two hours hold only four settling horizons of a temperature loop, which without a rhythm is refused as too short.`, '')
  const bare = short.filter(r => r.truth === 'huntingValve')
  say('| measure | value |', '|---|---|')
  say(`| sticking valves named, flow, pressure and level | ${percent(bare.filter(named).length, bare.length)} |`)
  say(`| sticking valves named, of those that got a cause (not \`cannotTell\`) | ${percent(bare.filter(named).length, bare.filter(r => !silent(r)).length)} |`)
  say(`| sticking valve named where the valve is sound (all types) | ${percent(accused.length, sound.length)} |`)
  say(`| accusations that are right | ${percent(all.filter(r => named(r) && r.truth === 'huntingValve').length, all.filter(named).length)} |`)
  say(`| sticking valve named where the valve has backlash only | ${percent(backlash.filter(named).length, backlash.length)} |`)
  say(`| cannot tell, flow, pressure and level | ${percent(short.filter(silent).length, short.length)} |`)
  const judged = all.filter(r => r.features.jumpSlips >= 0 || r.features.bendSlips >= 0)
  const probability = judged.map((r) => { const p = posteriorOf(r.features as FeatureValues); return p.probability[p.classes.indexOf('huntingValve')] })
  let error = 0
  const reliability: string[] = []
  for (let b = 0; b < 10; b++) {
    const own = judged.map((r, i) => i).filter(i => Math.min(9, Math.floor(10 * probability[i])) === b)
    if (!own.length) continue
    const said = own.reduce((s, i) => s + probability[i], 0) / own.length
    const right = own.filter(i => judged[i].truth === 'huntingValve').length / own.length
    error += (own.length / judged.length) * Math.abs(said - right)
    reliability.push(`| ${b / 10} to ${(b + 1) / 10} | ${own.length} | ${said.toFixed(2)} | ${right.toFixed(2)} |`)
  }
  say(`| expected calibration error of the probability that the valve sticks | ${error.toFixed(3)} |`, '')

  say('Sticking valves named, by the strokes that fell into the window (of the windows drawn).', '', `| strokes | ${WINDOW_TYPES.join(' | ')} | all | cannot tell |`, `|---|${WINDOW_TYPES.map(() => '---|').join('')}---|---|`)
  for (const [low, high, name] of [[1, 1, '1'], [2, 2, '2'], [3, 4, '3 or 4'], [5, 6, '5 or 6'], [7, 15, '7 to 15'], [16, Infinity, '16 or more']] as const) {
    const own = sticking.filter(r => r.slips! >= low && r.slips! <= high)
    say(`| ${name} | ${WINDOW_TYPES.map(t => cell(own.filter(r => r.type === t), named)).join(' | ')} | ${cell(own, named)} | ${cell(own, silent)} |`)
  }
  say('', 'Sticking valve named, by condition and loop type (of the windows drawn).', '', `| condition | ${WINDOW_TYPES.join(' | ')} | all | cannot tell |`, `|---|${WINDOW_TYPES.map(() => '---|').join('')}---|---|`)
  for (const condition of WINDOW_CONDITIONS) {
    const own = results.filter(r => r.window === condition)
    say(`| ${condition} | ${WINDOW_TYPES.map(t => cell(own.filter(r => r.type === t), named)).join(' | ')} | ${cell(own, named)} | ${cell(own, silent)} |`)
  }
  say('', '| probability of sticking said | windows | mean | true |', '|---|---|---|---|', ...reliability)
  if (options.wrong) for (const r of all) if (named(r) !== (r.truth === 'huntingValve')) console.log(r.window, r.type, r.seed, 'strokes', r.slips, '->', r.verdict, r.confidence, r.reason)
  return lines.join('\n')
}
