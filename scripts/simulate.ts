/**
 * npm run simulate -- --loops 500 --days 7 --interval 10 --seed 7 --layout wide --out week.csv
 *
 * Writes a simulated export of a historian, and beside it what is built into each loop (`week.truth.json`) and the loop list
 * (`week.loops.csv`). A name that ends in .gz is compressed. Memory does not grow with loops or days.
 */
import { createWriteStream } from 'node:fs'
import { writeFile } from 'node:fs/promises'
import { Readable } from 'node:stream'
import { pipeline } from 'node:stream/promises'
import { fileURLToPath } from 'node:url'
import { parseArgs } from 'node:util'
import { createGzip } from 'node:zlib'
import { MODE_NAMES } from '../shared/assessment/simulation/scenario'
import { planPlant } from '../shared/assessment/simulation/planPlant'
import { simulatePlantLoop, type PlantMemory } from '../shared/assessment/simulation/simulatePlant'
import { weekFrame } from '../shared/assessment/week/isoWeek'
import { ColumnSpool } from './lib/columnSpool'
import { loopListText } from './lib/loopListText'
import { trendText, type TrendColumn } from './lib/trendText'

export interface SimulateOptions {
  loops: number
  days: number
  intervalS: number
  seed: number
  layout: 'wide' | 'long'
  mix: 'plant' | 'balanced'
  zone: string
  /** ISO week in which the record begins, Monday 00:00 in the zone */
  week: string
  out: string
  progress?: (done: number, loops: number) => void
}

export async function simulateExport(options: SimulateOptions): Promise<{ rows: number, files: string[] }> {
  const { loops, days, intervalS, seed, layout, mix, zone, week, out } = options
  const startMs = weekFrame(week, zone).hourEdges[0]
  const rows = Math.floor(days * 86_400 / intervalS)
  const plan = planPlant({ loops, days, intervalS, seed, startMs, mix })
  const stem = out.replace(/\.gz$/i, '').replace(/\.[^./\\]+$/, '')
  const spool = new ColumnSpool(`${out}.spool`, loops, rows)
  const truths = []
  try {
    const memory: PlantMemory = new Map()
    const columns: TrendColumn[] = []
    for (let i = 0; i < loops; i++) {
      const { scenario, setup, primary } = plan[i]
      // a table needs one instant for all: what is not archived is interpolated
      if (scenario.compression) scenario.compression.report = 'interpolated'
      const { record, truth } = simulatePlantLoop(plan, i, memory)
      spool.put(i, record, scenario.decimals)
      columns.push({ tag: setup.tag, decimals: [scenario.decimals.pv, scenario.decimals.sp, scenario.decimals.op] })
      const iso = (ms: number) => new Date(ms).toISOString()
      truths.push({ ...truth, spans: truth.spans.map(s => ({ from: iso(s.fromMs), to: iso(s.toMs) })), upstream: setup.upstream, cascadeOf: primary === null ? null : plan[primary].setup.tag })
      options.progress?.(i + 1, loops)
    }
    const source = Readable.from(trendText(spool, columns, MODE_NAMES, layout, startMs, intervalS * 1000), { objectMode: false, highWaterMark: 1 << 20 })
    if (/\.gz$/i.test(out)) await pipeline(source, createGzip({ level: 4 }), createWriteStream(out))
    else await pipeline(source, createWriteStream(out))
  }
  finally {
    spool.close()
  }
  await writeFile(`${stem}.truth.json`, JSON.stringify({ seed, week, zone, days, intervalS, mix, loops: truths }, null, 1))
  await writeFile(`${stem}.loops.csv`, loopListText(plan.map(l => ({ setup: l.setup, description: l.description, area: l.area, unit: l.area, intervalS }))))
  return { rows, files: [out, `${stem}.truth.json`, `${stem}.loops.csv`] }
}

/** Reads the command line; throws an Error with a sentence for a person. */
export function readOptions(args: string[]): SimulateOptions {
  const { values } = parseArgs({
    args,
    options: {
      loops: { type: 'string', default: '100' }, days: { type: 'string', default: '7' }, interval: { type: 'string', default: '10' },
      seed: { type: 'string', default: '1' }, layout: { type: 'string', default: 'wide' }, mix: { type: 'string', default: 'plant' },
      zone: { type: 'string', default: 'UTC' }, week: { type: 'string', default: '2026-W48' }, out: { type: 'string', default: 'week.csv' },
    },
  })
  const number = (name: 'loops' | 'days' | 'interval' | 'seed', low: number, high: number, whole: boolean) => {
    const x = Number(values[name])
    if (!(x >= low && x <= high) || (whole && !Number.isInteger(x))) throw new Error(`--${name} must be ${whole ? 'a whole number' : 'a number'} from ${low} to ${high}, got "${values[name]}".`)
    return x
  }
  const oneOf = <T extends string>(name: 'layout' | 'mix', words: readonly T[]): T => {
    const word = words.find(w => w === values[name])
    if (!word) throw new Error(`--${name} must be ${words.join(' or ')}, got "${values[name]}".`)
    return word
  }
  return {
    loops: number('loops', 1, 100_000, true), days: number('days', 0.01, 400, false), intervalS: number('interval', 1, 3600, true), seed: number('seed', 0, 2 ** 32 - 1, true),
    layout: oneOf('layout', ['wide', 'long'] as const), mix: oneOf('mix', ['plant', 'balanced'] as const), zone: values.zone, week: values.week, out: values.out,
  }
}

if (process.argv[1] === fileURLToPath(import.meta.url)) {
  try {
    const options = readOptions(process.argv.slice(2))
    const { rows, files } = await simulateExport({
      ...options,
      progress: (done, loops) => { if (process.stderr.isTTY) process.stderr.write(`\r${done} of ${loops} loops simulated `) },
    })
    console.log(`${rows} rows of ${options.loops} loops: ${files.join(', ')}`)
  }
  catch (error) {
    console.error(error instanceof Error ? error.message : error)
    process.exitCode = 1
  }
}
