import { execFileSync } from 'node:child_process'
import { createReadStream, createWriteStream, mkdtempSync, rmSync, statSync } from 'node:fs'
import { availableParallelism, cpus, tmpdir } from 'node:os'
import { join } from 'node:path'
import { once } from 'node:events'
import { pipeline } from 'node:stream/promises'
import { parseArgs } from 'node:util'
import pg from 'pg'
import { from as copyFrom } from 'pg-copy-streams'
import { decodeBlocks } from '../db/blocks/decodeBlocks'
import { findLoop, listLoops } from '../db/repositories/loops'
import { insertDue, notifyWork } from '../db/repositories/loopWeekWrites'
import { listBlocks } from '../db/repositories/trendBlocks'
import { loopTrend } from '../server/services/loops/loopTrend'
import { thinTrend } from '../server/services/loops/thinTrend'
import { startCluster } from '../scripts/lib/cluster.mjs'
import { openDatabase } from '../db/knex'
import { alternate, median, report, save } from './harness'
import { makeExport } from './makeExport'
import { numerics } from './numerics'
import { nowMb, peakMb, Plant } from './plant'

/** npm run bench [-- --quick] [-- --only reading,upload]: the ratios that the design promises, measured back to back. */
const { values: args } = parseArgs({ options: { quick: { type: 'boolean', default: false }, only: { type: 'string' }, times: { type: 'string' } } })
const wanted = args.only?.split(',')
const runs = (name: string) => !wanted || wanted.includes(name)
const TIMES = args.times ? Number(args.times) : args.quick ? 1 : 5
const folder = mkdtempSync(join(tmpdir(), 'fettle-bench-files-'))
const clusterFolder = `/var/tmp/fettle-bench-${process.pid}`
const file = (name: string) => join(folder, name)
const START = Date.UTC(2026, 10, 23)
const END = START + 7 * 86_400_000
const mb = (bytes: number) => Math.round(bytes / 1e6)

try { await main() }
finally {
  save('bench-results.json', { at: new Date().toISOString(), node: process.version, cpu: cpus()[0].model, cores: availableParallelism(), quick: args.quick })
  rmSync(folder, { recursive: true, force: true })
}

async function main(): Promise<void> {
  if (runs('reading')) await reading()
  if (runs('numerics')) await numerics(args.quick ? 3 : 9)
  if (!['storing', 'upload', 'drawing', 'linearity', 'workers', 'memory', 'fleet', 'large'].some(runs)) return
  const cluster = await startCluster(clusterFolder)
  try {
    const admin = openDatabase(cluster.url('postgres'), { poolSize: 1 })
    await admin.raw('create database bench')
    await admin.destroy()
    const plant = await Plant.open(cluster.url('bench'))
    try {
      await plant.startWeb()
      if (runs('upload') || runs('storing') || runs('drawing')) await upload(plant)
      if (runs('linearity')) await linearity(plant)
      if (runs('workers')) await workers(plant)
      if (runs('memory')) await memory(plant)
      if (runs('fleet')) await fleet(plant)
      // ten minutes and 7 GB of disk: only when asked for
      if (wanted?.includes('large')) await large(plant)
    }
    finally { await plant.stop() }
  }
  finally {
    await cluster.stop()
    rmSync(clusterFolder, { recursive: true, force: true })
  }
}

/** Scanning into columns against csv-parse and Number(), each in a fresh process. */
async function reading(): Promise<void> {
  for (const layout of ['wide', 'long'] as const) {
    const path = file(`read-${layout}.csv`)
    await makeExport({ path, loops: layout === 'wide' ? 100 : 40, days: args.quick ? 0.25 : layout === 'wide' ? 3 : 1, intervalS: 10, layout, seed: 1 })
    const sums = new Set<number>()
    const one = (reader: string) => () => {
      const { ms, sum } = JSON.parse(execFileSync(process.execPath, ['--import', 'tsx', join(import.meta.dirname, 'readFile.ts'), reader, path]).toString())
      sums.add(sum)
      return ms as number
    }
    const [ours, library] = await alternate(TIMES, one('ours'), one('library'))
    if (sums.size !== 1) throw new Error(`The two readers disagree: ${[...sums]}`)
    const size = statSync(path).size
    report(`reading ${layout}, cold`, library / ours, `scanner ${(size / 1e3 / ours).toFixed(0)} MB/s against csv-parse and Number() ${(size / 1e3 / library).toFixed(0)} MB/s, ${mb(size)} MB`, { least: 5 }, { ours, library })
    rmSync(path)
  }
}

/** The upload of a week against COPY of the same rows, and what both leave on disk; then drawing from both. */
async function upload(plant: Plant): Promise<void> {
  const loops = args.quick ? 10 : 100
  const path = file('week.csv')
  await makeExport({ path, loops, days: 7, intervalS: 10, layout: 'wide', seed: 1 })
  const rowsFile = file('rows.csv')
  await plant.startWorkers(1)
  // the rows to copy come out of the blocks of a first upload, so that both hold the same samples
  await plant.done(await plant.send(path))
  await writeRows(plant, rowsFile)
  const oneUpload = async () => {
    await plant.clear()
    const started = performance.now()
    await plant.done(await plant.send(path))
    return performance.now() - started
  }
  const oneCopy = async () => {
    await plant.db.raw('drop table if exists sample_rows')
    await plant.db.raw('checkpoint')
    const client = new pg.Client({ connectionString: plant.url })
    await client.connect()
    const started = performance.now()
    await client.query('create table sample_rows (loop integer, ts timestamptz, sp double precision, pv double precision, op double precision, mode text, primary key (loop, ts))')
    await pipeline(createReadStream(rowsFile), client.query(copyFrom('copy sample_rows from stdin (format csv)')))
    const ms = performance.now() - started
    await client.end()
    return ms
  }
  if (runs('upload')) {
    const freshUpload = async () => {
      await plant.stopWorkers()
      await plant.clear()
      await plant.startWorkers(1)
      return oneUpload()
    }
    const restedUpload = async () => {
      await plant.stopWorkers()
      await plant.clear()
      await plant.startWorkers(1)
      // as on a plant, where the day's first upload meets a worker that was started long ago: it has rehearsed by now
      await new Promise(r => setTimeout(r, 18_000))
      return oneUpload()
    }
    const [cold, copyCold] = await alternate(TIMES, freshUpload, oneCopy)
    report('upload of a week, worker started that moment', copyCold / cold, `${loops} loops over HTTP to blocks, all measures and ranking ${(cold / 1000).toFixed(1)} s, against COPY of the same rows ${(copyCold / 1000).toFixed(1)} s`, { least: 3 }, { cold, copyCold })
    const [rested, copyRested] = await alternate(TIMES, restedUpload, oneCopy)
    report('first upload of a worker that has been up for 18 s', copyRested / rested, `the same, ${(rested / 1000).toFixed(1)} s against COPY ${(copyRested / 1000).toFixed(1)} s`, { least: 3 }, { rested, copyRested })
    await oneUpload()
    const [warm, copyWarm] = await alternate(TIMES, oneUpload, oneCopy)
    report('upload of a week, warm worker', copyWarm / warm, `the same with a worker that has worked before ${(warm / 1000).toFixed(1)} s, against COPY ${(copyWarm / 1000).toFixed(1)} s`, { least: 6 }, { warm, copyWarm })
    const row = await plant.db('imports').orderBy('id', 'desc').first()
    console.log(`  of it reading ${row.mapping.readSeconds.toFixed(1)} s, assessing ${((row.finished_at - Date.parse(row.mapping.assessingSince)) / 1000).toFixed(1)} s; peak memory of the worker ${peakMb(plant.workers[0]).toFixed(0)} MB`)
  }
  else { await oneCopy() }
  if (runs('storing')) {
    const size = async (table: string) => Number((await plant.db.raw('select pg_total_relation_size(?) as n', [table])).rows[0].n)
    for (const table of ['trend_blocks', 'sample_rows']) await plant.db.raw(`vacuum (full) ${table}`)
    const [blocks, rows] = [await size('trend_blocks'), await size('sample_rows')]
    report('disk of a stored week', rows / blocks, `${mb(blocks)} MB as blocks against ${mb(rows)} MB as rows with their primary key`, { least: 20 }, { blocks, rows })
  }
  if (runs('drawing')) await drawing(plant)
  await plant.stopWorkers()
  await plant.db.raw('drop table if exists sample_rows')
  await plant.clear()
}

async function writeRows(plant: Plant, path: string): Promise<void> {
  const out = createWriteStream(path, { highWaterMark: 1 << 20 })
  for (const [k, loop] of (await listLoops(plant.db)).entries()) {
    const { t, sp, pv, op, mode, modeNames } = decodeBlocks(await listBlocks(plant.db, [loop.id], START, END), START, END)
    let text = ''
    for (let i = 0; i < t.length; i++) text += `${k},${new Date(t[i]).toISOString()},${sp![i]},${pv![i]},${op![i]},${modeNames[mode![i]]}\n`
    if (!out.write(text)) await once(out, 'drain')
  }
  out.end()
  await once(out, 'finish')
}

/** One loop-week to 1,500 points. */
async function drawing(plant: Plant): Promise<void> {
  const { db } = plant
  await db.raw('analyze sample_rows')
  await db.raw('analyze trend_blocks')
  const tag = (await listLoops(db))[3].tag
  const loop = (await findLoop(db, tag))!
  const k = (await listLoops(db)).findIndex(l => l.id === loop.id)
  const blocks = async () => { await loopTrend(db, tag, { from: new Date(START), to: new Date(END), points: 1500 }) }
  const width = (END - START) / 375 / 1000
  const sql = async () => {
    await db.raw(`select floor(extract(epoch from ts - to_timestamp(?)) / ?) as bucket, min(ts) as t, min(pv) as pv_low, max(pv) as pv_high, min(op) as op_low, max(op) as op_high, min(sp) as sp_low, max(sp) as sp_high, max(mode) as mode
      from sample_rows where loop = ? and ts >= to_timestamp(?) and ts < to_timestamp(?) group by bucket order by bucket`, [START / 1000, width, k, START / 1000, END / 1000])
  }
  const rows = async () => {
    const found = await db('sample_rows').where({ loop: k }).where('ts', '>=', new Date(START)).where('ts', '<', new Date(END)).orderBy('ts')
    const pick = (f: (r: any) => number) => Float64Array.from(found, f)
    thinTrend({ t: pick(r => r.ts.getTime()), pv: pick(r => r.pv), sp: pick(r => r.sp), op: pick(r => r.op), mode: null, modeNames: [] }, 1500)
  }
  for (const warm of [blocks, sql, rows]) await warm()
  const times = args.quick ? 3 : 11
  const [b, s] = await alternate(times, blocks, sql)
  report('drawing a loop-week, against SQL', s / b, `to 1,500 points from blocks ${b.toFixed(1)} ms against buckets in SQL ${s.toFixed(1)} ms`, { least: 8 }, { blocks: b, sql: s })
  const [b2, r] = await alternate(times, blocks, rows)
  report('drawing a loop-week, against rows', r / b2, `the same ${b2.toFixed(1)} ms against all rows through knex ${r.toFixed(1)} ms`, { least: 12 }, { blocks: b2, rows: r })
}

/** Time per loop of a whole upload at 500 and 2,000 loops against 50. */
async function linearity(plant: Plant): Promise<void> {
  const [few, ...more] = args.quick ? [10, 40] : [50, 500, 2000]
  for (const n of [few, ...more]) await makeExport({ path: file(`day-${n}.csv`), loops: n, days: 1, intervalS: 10, layout: 'wide', seed: 2 })
  await plant.startWorkers(1)
  const one = (n: number) => async () => {
    await plant.clear()
    const started = performance.now()
    await plant.done(await plant.send(file(`day-${n}.csv`)))
    return (performance.now() - started) / n
  }
  await one(few)()
  for (const many of more) {
    const [a, b] = await alternate(Math.min(TIMES, 3), one(few), one(many))
    report(`time per loop at ${many} loops against ${few}`, b / a, `a day at 10 s, ${b.toFixed(1)} ms a loop against ${a.toFixed(1)} ms`, { under: 1.2 }, { few: a, many: b })
  }
  await plant.stopWorkers()
}

/** Two worker processes against one, each with one thread of computing: the assessment of many loop-weeks. */
async function workers(plant: Plant): Promise<void> {
  const n = args.quick ? 120 : 500
  const path = file(`workers-${n}.csv`)
  await plant.clear()
  await makeExport({ path, loops: n, days: 1, intervalS: 10, layout: 'wide', seed: 2 })
  await plant.startWorkers(1)
  await plant.done(await plant.send(path))
  await plant.stopWorkers()
  const loops = await listLoops(plant.db)
  const one = (count: number) => async () => {
    await plant.startWorkers(count, 1)
    const due = async (ids: number[]) => {
      await plant.db.transaction(async (trx) => {
        await insertDue(trx, ids.map(loopId => ({ loopId, week: '2026-W48' })), 'bench', null)
        await notifyWork(trx)
      })
      while (Number((await plant.db('weeks_due').count())[0].count) > 0) await new Promise(r => setTimeout(r, 10))
    }
    // the start of threads and their first compilation are not what is measured
    await due(loops.slice(0, 40 * count).map(l => l.id))
    const started = performance.now()
    await due(loops.map(l => l.id))
    const ms = performance.now() - started
    await plant.stopWorkers()
    return ms
  }
  const [two, single] = await alternate(Math.min(TIMES, 3), one(2), one(1))
  report('two worker processes against one', single / two, `${n} loop-weeks assessed, one thread each: ${(two / 1000).toFixed(1)} s against ${(single / 1000).toFixed(1)} s`, { least: 1.4 }, { two, single })
}

/** 500 loops at 1 s: a week in one file, against the memory that a worker may take. */
async function large(plant: Plant): Promise<void> {
  await plant.clear()
  const path = file('large.csv')
  await makeExport({ path, loops: 500, days: args.quick ? 0.1 : 7, intervalS: 1, layout: 'wide', seed: 2 })
  await plant.startWorkers(1)
  const started = performance.now()
  const row = await plant.done(await plant.send(path))
  const peak = peakMb(plant.workers[0])
  report('a week of 500 loops at 1 s', peak / 2048, `${(statSync(path).size / 1e9).toFixed(1)} GB, ${Math.round(row.samples / 1e6)} M values in ${((performance.now() - started) / 1000).toFixed(0)} s; memory of the worker ${peak.toFixed(0)} MB at the peak against 2048 MB`, { under: 1 }, { peak })
  await plant.stopWorkers()
  rmSync(path)
}

/** Memory of the web process while a large file comes in. */
async function memory(plant: Plant): Promise<void> {
  const path = file('large.bin')
  const out = createWriteStream(path)
  const block = Buffer.alloc(1 << 20, 'timestamp,TIC-1.PV\n')
  const size = args.quick ? 100 : 1000
  for (let i = 0; i < size; i++) if (!out.write(block)) await once(out, 'drain')
  out.end()
  await once(out, 'finish')
  await plant.clear()
  await plant.get('/api/health')
  const before = Math.max(nowMb(plant.web!), 0)
  const peakBefore = peakMb(plant.web!)
  await plant.send(path)
  const extra = peakMb(plant.web!) - Math.max(before, Math.min(peakBefore, before))
  report('memory of the web process', extra / 100, `${extra.toFixed(0)} MB more at the peak while ${size} MB are uploaded, against 100 MB`, { under: 1 }, { before, peakBefore, extra })
  await plant.clear()
}

/** Server time of the fleet table at 2,000 loops against 100. */
async function fleet(plant: Plant): Promise<void> {
  const { db } = plant
  await plant.clear()
  const path = file('fleet.csv')
  await makeExport({ path, loops: 20, days: 0.2, intervalS: 10, layout: 'wide', seed: 2 })
  await plant.startWorkers(1)
  await plant.done(await plant.send(path))
  await plant.stopWorkers()
  const columns = Object.keys(await db('loop_weeks').first()).filter(c => c !== 'loop_id').map(c => `"${c}"`).join(', ')
  const grow = async (to: number) => {
    const from = Number((await db('loops').count())[0].count)
    await db.raw(`insert into loops (tag, type, pv_low, pv_high) select 'XIC-' || g, 'flow', 0, 100 from generate_series(?::int, ?::int) g`, [from + 1, to])
    await db.raw(`insert into loop_weeks (loop_id, ${columns}) select n.id, ${columns} from (select id, row_number() over (order by id) as k from loops where tag like 'XIC-%') n
      join (select *, row_number() over (order by loop_id) as k from loop_weeks w where exists (select from loops where loops.id = w.loop_id and tag not like 'XIC-%')) w on w.k = 1 + n.k % 20 on conflict do nothing`)
    await db.raw('analyze loops')
    await db.raw('analyze loop_weeks')
    const times: number[] = []
    for (let i = 0; i < (args.quick ? 5 : 21); i++) {
      const started = performance.now()
      await plant.get('/api/loops?week=2026-W48&limit=100')
      times.push(performance.now() - started)
    }
    return median(times.slice(2))
  }
  const small = await grow(100)
  const large = await grow(2000)
  report('fleet table at 2,000 loops against 100', large / small, `first 100 rows in ${large.toFixed(1)} ms against ${small.toFixed(1)} ms`, { under: 4 }, { small, large })
}
