/**
 * npm run accuracy: how right the verdicts are on simulated loops that the calibration has not seen.
 *
 * 1,008 loops, balanced over 14 causes and 6 loop types, seeds from FIRST_SEED upwards. Prints the confusion matrix, recall, precision,
 * calibration error and false accusations, and writes them as Markdown to ACCURACY.md; where README.md has the lines
 * `<!-- accuracy -->` and `<!-- /accuracy -->`, what lies between is replaced. With --windows the same for short windows (windowAccuracy.ts), which
 * have a chapter of their own in ACCURACY.md. Options: --seeds N a cause and type, --first SEED (windows), --save FILE, --from FILE.
 */
import { existsSync, readFileSync, writeFileSync } from 'node:fs'
import { fileURLToPath } from 'node:url'
import { CAUSES } from '../shared/assessment/simulation/scenario'
import { VERDICTS, type Verdict } from '../shared/assessment/types'
import { LOOP_TYPES, runCases, type Case, type CaseResult } from './simulatedCases'
import { windowAccuracy } from './windowAccuracy'

// Never looked at while rules were written: take a new one after wrong cases of this set were looked at.
export const FIRST_SEED = 7_000_000
const option = (name: string) => { const i = process.argv.indexOf(`--${name}`); return i > 0 ? process.argv[i + 1] : undefined }
const seeds = Number(option('seeds') ?? 12)

const from = option('from')
const root = (name: string) => fileURLToPath(new URL(`../${name}`, import.meta.url))
/** Each command writes its own chapter and leaves the other. */
const WINDOWS_HEAD = '\n## Short windows\n\n'
function writeChapter(chapter: 'loops' | 'windows', text: string): void {
  const file = root('ACCURACY.md')
  const [loops, windows] = existsSync(file) ? readFileSync(file, 'utf8').split(WINDOWS_HEAD) : ['']
  const first = chapter === 'loops' ? `# How right the verdicts are\n\n${text}\n` : loops
  const second = chapter === 'windows' ? `${text}\n` : windows
  writeFileSync(file, second === undefined ? first : `${first}${WINDOWS_HEAD}${second}`)
}
if (process.argv.includes('--windows')) {
  const seeds = option('seeds')
  const text = await windowAccuracy({ seeds: seeds ? Number(seeds) : undefined, firstSeed: option('first') ? Number(option('first')) : undefined, from, save: option('save'), wrong: process.argv.includes('--wrong') })
  console.log(`\n${text}`)
  if (!seeds && !from && !option('first')) writeChapter('windows', text)
  process.exit(0)
}

const cases: Case[] = CAUSES.flatMap(cause => LOOP_TYPES.flatMap(type => Array.from({ length: seeds }, (_, s) => ({ cause, type, seed: FIRST_SEED + s }))))
const results: CaseResult[] = from
  ? JSON.parse(readFileSync(from, 'utf8')) as CaseResult[]
  : await runCases(cases, 2, (done) => { if (done % 200 < 8) process.stdout.write(`\r${done} of ${cases.length} loops`) })
const save = option('save')
if (save) writeFileSync(save, JSON.stringify(results))

const share = (part: number, whole: number): number => (whole > 0 ? part / whole : NaN)
const percent = (x: number): string => (x === x ? `${(100 * x).toFixed(1)} %` : '-')
const assessable = results.filter(r => r.truth !== 'cannotTell')
const answered = assessable.filter(r => r.verdict !== 'cannotTell')
const truths = VERDICTS.filter(v => v !== 'cannotTell')
const recall = (v: Verdict) => { const own = answered.filter(r => r.truth === v); return share(own.filter(r => r.verdict === v).length, own.length) }
const precision = (v: Verdict) => { const said = answered.filter(r => r.verdict === v); return share(said.filter(r => r.truth === v).length, said.length) }
const mean = (values: number[]) => { const known = values.filter(v => v === v); return known.reduce((a, b) => a + b, 0) / known.length }

const sound = results.filter(r => r.cause !== 'stickingValve' && r.hidden !== 'stickingValve')
const accused = sound.filter(r => r.verdict === 'huntingValve')
const healthy = results.filter(r => r.cause === 'healthy')
const ill = healthy.filter(r => r.verdict !== 'steady' && r.verdict !== 'cannotTell')
let calibrationError = 0
const reliability: string[] = []
for (let b = 0; b < 10; b++) {
  const inBin = answered.filter(r => Math.min(9, Math.floor(r.confidence * 10)) === b)
  if (!inBin.length) continue
  const said = mean(inBin.map(r => r.confidence))
  const right = share(inBin.filter(r => r.verdict === r.truth).length, inBin.length)
  calibrationError += (inBin.length / answered.length) * Math.abs(said - right)
  reliability.push(`| ${b / 10} to ${(b + 1) / 10} | ${inBin.length} | ${said.toFixed(2)} | ${right.toFixed(2)} |`)
}

const lines: string[] = []
const say = (...l: string[]) => lines.push(...l)
say(`Made by \`npm run accuracy\`: ${results.length} simulated loops the calibration has not seen (seeds from ${FIRST_SEED}), balanced over ${CAUSES.length} causes and ${LOOP_TYPES.length} loop types.`, '')
say('| measure | value | wanted |', '|---|---|---|')
say(`| macro recall | ${mean(truths.map(recall)).toFixed(3)} | 0.85 or more |`)
say(`| macro precision | ${mean(truths.map(precision)).toFixed(3)} | 0.85 or more |`)
say(`| cannot tell, of the assessable loops | ${percent(share(assessable.length - answered.length, assessable.length))} | below 15 % |`)
say(`| cannot tell, of the loops sampled too slowly or compressed | ${percent(share(results.filter(r => r.truth === 'cannotTell' && r.verdict === 'cannotTell').length, results.length - assessable.length))} | - |`)
say(`| sticking valve named where the valve is sound | ${percent(share(accused.length, sound.length))} | below 5 % |`)
say(`| healthy loops called unhealthy | ${percent(share(ill.length, healthy.length))} | below 3 % |`)
say(`| expected calibration error | ${calibrationError.toFixed(3)} | below 0.05 |`, '')
say('Truth in rows, verdict in columns.', '', `| | ${VERDICTS.join(' | ')} | recall | precision |`, `|---|${VERDICTS.map(() => '---|').join('')}---|---|`)
for (const t of VERDICTS) {
  const own = results.filter(r => r.truth === t)
  say(`| ${t} | ${VERDICTS.map(v => own.filter(r => r.verdict === v).length || '').join(' | ')} | ${t === 'cannotTell' ? '' : percent(recall(t))} | ${t === 'cannotTell' ? '' : percent(precision(t))} |`)
}
say('', 'Verdicts that are wrong and not `cannotTell`, by cause and loop type (of the loops drawn).', '', `| cause | ${LOOP_TYPES.join(' | ')} | all | valve wrongly named |`, `|---|${LOOP_TYPES.map(() => '---|').join('')}---|---|`)
for (const cause of CAUSES) {
  const own = results.filter(r => r.cause === cause)
  const wrong = (list: CaseResult[]) => `${list.filter(r => r.verdict !== r.truth && r.verdict !== 'cannotTell').length}/${list.length}`
  const named = cause === 'stickingValve' ? '-' : String(own.filter(r => r.verdict === 'huntingValve' && r.hidden !== 'stickingValve').length)
  say(`| ${cause} | ${LOOP_TYPES.map(t => wrong(own.filter(r => r.type === t))).join(' | ')} | ${wrong(own)} | ${named} |`)
}
say('', '| confidence said | verdicts | mean | right |', '|---|---|---|---|', ...reliability)

const text = lines.join('\n')
console.log(`\n${text}`)
if (!option('seeds') && !from) {
  writeChapter('loops', text)
  if (existsSync(root('README.md'))) {
    const readme = readFileSync(root('README.md'), 'utf8')
    const replaced = readme.replace(/(<!-- accuracy -->\n)[\s\S]*?(<!-- \/accuracy -->)/, `$1${text}\n$2`)
    if (replaced !== readme) writeFileSync(root('README.md'), replaced)
  }
}
if (process.argv.includes('--wrong')) for (const r of results) if (r.verdict !== r.truth) console.log(r.cause, r.type, r.seed, '->', r.verdict, r.confidence, JSON.stringify(r.findings.slice(0, 3)), r.reason)
