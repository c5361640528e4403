/**
 * Developer's tool: runs CSV files through the assessment and prints a line for each loop.
 *
 *   node --import tsx scripts/assess-csv.ts FILE... [--type flow] [--settling 30] [--tolerance 1] [--json]
 *
 * Columns: time (ISO, `t_s`, `t_min`), then sp, pv, op, mode; or wide `TAG.pv`, `TAG.op`. Ranges come from the data (rounded
 * up), the type from the tag's first letter, everything else from the defaults of the type. Not the import: no checks.
 */
import { readFileSync } from 'node:fs'
import { basename } from 'node:path'
import { assessLoopWeek } from '../shared/assessment/assessLoopWeek'
import { defaultSetup } from '../shared/assessment/defaultSetup'
import { weekFrame, weekOf } from '../shared/assessment/week/isoWeek'
import { MODE_UNKNOWN, type LoopRecord, type LoopSetup, type LoopType } from '../shared/assessment/types'

const args = process.argv.slice(2)
const option = (name: string) => { const i = args.indexOf(`--${name}`); return i >= 0 ? args[i + 1] : undefined }
const files = args.filter((a, i) => !a.startsWith('--') && !(i > 0 && args[i - 1].startsWith('--') && args[i - 1] !== '--json'))

const letters: Record<string, LoopType> = { F: 'flow', P: 'pressure', L: 'level', T: 'temperature', A: 'analysis' }
const typeOf = (tag: string): LoopType => (option('type') as LoopType) ?? letters[/([FPLTA])I?C/.exec(tag.toUpperCase())?.[1] ?? ''] ?? 'other'

function niceAbove(x: number): number {
  const p = 10 ** Math.floor(Math.log10(x))
  return [1, 1.5, 2, 3, 4, 5, 6, 8, 10].map(m => m * p).find(v => v >= x)!
}

function read(file: string): { tag: string, record: LoopRecord }[] {
  const lines = readFileSync(file, 'utf8').split(/\r?\n/).filter(l => l)
  const header = lines[0].split(',').map(h => h.trim())
  const rows = lines.slice(1).map(l => l.split(','))
  const start = Date.UTC(2026, 10, 23)
  const first = header[0].toLowerCase()
  const t = Float64Array.from(rows, r => first === 't_s' ? start + Number(r[0]) * 1000 : first === 't_min' ? start + Number(r[0]) * 60_000 : Date.parse(`${r[0].replace(' ', 'T')}Z`))
  const tags = header.some(h => /\.pv$/i.test(h)) ? header.filter(h => /\.pv$/i.test(h)).map(h => h.slice(0, -3)) : ['']
  return tags.map((tag) => {
    const column = (name: string) => {
      const i = header.findIndex(h => h.toLowerCase() === (tag ? `${tag}.${name}` : name).toLowerCase())
      return i < 0 ? null : Float64Array.from(rows, r => (r[i] === '' || r[i] === undefined ? NaN : Number(r[i])))
    }
    const mode = column('mode')
    const modeNames = mode ? [...new Set(mode)].filter(m => m === m).map(String) : []
    return {
      tag: tag || basename(file).replace(/\.csv$/, ''),
      record: { t, pv: column('pv')!, sp: column('sp'), op: column('op'), mode: mode ? Uint8Array.from(mode, m => m === m ? modeNames.indexOf(String(m)) : MODE_UNKNOWN) : null, modeNames },
    }
  })
}

const f = (x: number | null, d = 2) => (x === null ? '-' : x.toPrecision(d + 1))
for (const file of files) {
  for (const { tag, record } of read(file)) {
    const type = typeOf(tag)
    const known = record.pv.filter(v => v === v)
    const high = known.reduce((a, b) => Math.max(a, b), -Infinity)
    const low = known.reduce((a, b) => Math.min(a, b), Infinity)
    const pvLow = low < 0 ? -niceAbove(-low * 1.2) : 0
    const pvHigh = niceAbove(Math.max(high, 1e-6) * 1.2)
    const opHigh = record.op && record.op.some(v => v > 105) ? 255 : 100
    const defaults = defaultSetup(type)
    const setup: LoopSetup = {
      ...defaults, tag, pvLow, pvHigh, opHigh,
      settlingS: Number(option('settling') ?? defaults.settlingS),
      tolerance: Number(option('tolerance') ?? (defaults.tolerance / 100) * (pvHigh - pvLow)),
    }
    const zone = 'UTC'
    const week = weekFrame(weekOf(record.t[record.t.length >> 1], zone), zone)
    const begin = performance.now()
    const r = assessLoopWeek(record, setup, week, [])
    const ms = performance.now() - begin
    if (args.includes('--json')) { console.log(JSON.stringify({ tag, ...r }, null, 1)); continue }
    const m = r.measures
    console.log([tag.slice(0, 42).padEnd(42), type.padEnd(11), r.verdict.padEnd(15), r.confidence.toFixed(2), `h${r.hours.hunting} o${r.hours.offTarget} u${r.hours.saturated} m${r.hours.manual} x${r.hours.sensor} s${r.hours.steady}`.padEnd(26),
      `T ${f(m.oscillationPeriod)} r ${f(m.oscillationIndex)} A ${f(m.oscillationAmplitude)} ratio ${f(m.varianceRatio)} cf ${f(m.compressionFactor, 1)} stick ${f(m.apparentStiction, 1)}`.padEnd(60), `${ms.toFixed(0)} ms`, r.verdictReason].join(' | '))
  }
}
