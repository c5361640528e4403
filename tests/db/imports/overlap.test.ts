import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest'
import { findImport, updateImport } from '../../../db/repositories/imports'
import { findLoop, updateLoop } from '../../../db/repositories/loops'
import { assessDue } from '../../../server/services/assessments/assessDue'
import { reassess } from '../../../server/services/assessments/reassess'
import { requestReassessment } from '../../../server/services/assessments/requestReassessment'
import assess from '../../../server/threads/assess'
import { scratchDatabase, type ScratchDatabase } from '../../setup/scratchDatabase'
import { empty, removeDataDir, stored, upload } from './upload'

let scratch: ScratchDatabase
beforeAll(async () => { scratch = await scratchDatabase() })
afterAll(async () => {
  await scratch.drop()
  removeDataDir()
})
beforeEach(() => empty(scratch.db))

const START = Date.UTC(2026, 10, 23)
/** One loop, `n` rows every `stepS` from `fromS`, PV by a formula. */
function csv({ tag = 'FIC-7', fromS = 0, n = 100, stepS = 10, pv = (s: number) => (s % 70) / 10, sp = '5' }: { tag?: string, fromS?: number, n?: number, stepS?: number, pv?: (s: number) => number | '', sp?: string }): string {
  const lines = Array.from({ length: n }, (_, i) => {
    const s = fromS + i * stepS
    return `${new Date(START + s * 1000).toISOString()},${pv(s)},${sp},40,AUTO`
  })
  return [`time,${tag}.PV,${tag}.SP,${tag}.OP,${tag}.MODE`, ...lines].join('\n')
}
const assessAll = () => assessDue(scratch.db, async task => assess(task), { lanes: 2, batch: 3 })
const history = async () => await scratch.db('loop_week_history').orderBy('id').select('week', 'cause')

describe('overlapping files', () => {
  it('later uploads win sample by sample, and the import says how many samples changed', async () => {
    await upload(scratch.db, { text: csv({}) })
    const later = await upload(scratch.db, { text: csv({ fromS: 500, n: 100, pv: s => s === 600 ? '' : s === 700 || s === 800 ? 9.99 : (s % 70) / 10 }) })
    expect(later).toMatchObject({ samples: 399, changed: 2, missing: { empty: 1 } })
    const all = (await stored(scratch.db, 'FIC-7'))!
    expect(all.t.length).toBe(150)
    expect(all.pv).toEqual(all.t.map(t => (t - START) / 1000).map(s => s === 700 || s === 800 ? 9.99 : (s % 70) / 10))
  })

  it('signals that come in files of their own end in one record', async () => {
    const whole = csv({})
    const columns = (keep: number[]) => whole.split('\n').map(line => line.split(',').filter((_, i) => keep.includes(i)).join(',')).join('\n')
    await upload(scratch.db, { text: columns([0, 1, 4]) })
    const second = await upload(scratch.db, { text: columns([0, 2, 3]) })
    expect(second).toMatchObject({ samples: 200, changed: 0 })
    const joined = await stored(scratch.db, 'FIC-7')
    await empty(scratch.db)
    await upload(scratch.db, { text: whole })
    expect(joined).toEqual(await stored(scratch.db, 'FIC-7'))
  })

  it('how a file is cut into pieces of memory makes no difference', async () => {
    // three days at 20 s, small and large budgets for the values; shuffled rows too
    const text = csv({ n: 12_960, stepS: 20, pv: s => Math.round(500 + 300 * Math.sin(s / 900)) / 100 })
    await upload(scratch.db, { text })
    const once = await stored(scratch.db, 'FIC-7')
    expect(once!.t.length).toBe(12_960)
    const [header, ...rows] = text.split('\n')
    const shuffled = [...rows.slice(7000), ...rows.slice(0, 3000).reverse(), ...rows.slice(3000, 7000)]
    for (const [body, bytes] of [[rows, 20_000], [shuffled, 20_000], [shuffled, 1 << 24], [[...rows, ...rows.slice(50, 60)], 1 << 16]] as const) {
      await empty(scratch.db)
      const done = await upload(scratch.db, { text: [header, ...body].join('\n') }, {}, bytes)
      expect(done).toMatchObject({ changed: 0, rejected: 0 })
      expect(await stored(scratch.db, 'FIC-7')).toEqual(once)
      expect((await upload(scratch.db, { text })).weeks).toEqual([])
    }
  })
})

describe('what is assessed', () => {
  it('exactly the loop-weeks that an upload touches, and the old figures go to the history', async () => {
    const WEEK_S = 7 * 86_400
    await upload(scratch.db, { text: csv({ n: 400 }) })
    await upload(scratch.db, { text: csv({ tag: 'TIC-8', n: 400, fromS: WEEK_S - 2000 }) })
    await assessAll()
    const weeks = () => scratch.db('loop_weeks as w').join('loops as l', 'l.id', 'w.loop_id').orderBy(['l.tag', 'w.week']).select('l.tag', 'w.week', 'w.lost_hours')
    expect((await weeks()).map(w => `${w.tag} ${w.week}`)).toEqual(['FIC-7 2026-W48', 'TIC-8 2026-W48', 'TIC-8 2026-W49'])
    expect(await history()).toEqual([])
    const late = await upload(scratch.db, { text: csv({ tag: 'TIC-8', fromS: WEEK_S + 100, n: 3, pv: () => 3.21 }) })
    expect(late).toMatchObject({ status: 'assessing', weeks: ['2026-W49'], toAssess: 1 })
    await assessAll()
    expect(await history()).toEqual([{ week: '2026-W49', cause: `import ${late.id}` }])
    expect(await findImport(scratch.db, late.id)).toMatchObject({ status: 'done', progress: 1, assessed: 1 })
  })

  it('a changed set-up, an outage: the weeks of that loop, of that span', async () => {
    await upload(scratch.db, { text: csv({ n: 400 }) })
    await upload(scratch.db, { text: csv({ tag: 'TIC-8', n: 400 }) })
    await assessAll()
    const loop = (await findLoop(scratch.db, 'FIC-7'))!
    await scratch.db.transaction(async (trx) => {
      await updateLoop(trx, loop.id, { tolerance: 0.5 })
      expect(await reassess(trx, [loop.id], null, 'tolerance changed')).toBe(1)
    })
    await assessAll()
    expect(await history()).toEqual([{ week: '2026-W48', cause: 'tolerance changed' }])
    const [row] = await scratch.db('loop_weeks').where({ loop_id: loop.id }).select('loop_version')
    expect(row.loop_version).toBe(loop.version + 1)
    await scratch.db.transaction(trx => requestReassessment(trx, { areaId: null, from: new Date(START - 86_400_000), to: new Date(START) }))
    expect(await scratch.db('assessments_due')).toEqual([])
    await scratch.db.transaction(trx => requestReassessment(trx, { areaId: null, from: new Date(START), to: new Date(START + 1) }))
    expect((await scratch.db('assessments_due')).length).toBe(2)
  })

  it('a loop-week that is asked for twice counts for both imports', async () => {
    const first = await upload(scratch.db, { text: csv({}) })
    const second = await upload(scratch.db, { text: csv({ fromS: 2000 }) })
    await assessAll()
    for (const { id } of [first, second]) expect(await findImport(scratch.db, id)).toMatchObject({ status: 'done', toAssess: 1, assessed: 1 })
    expect((await scratch.db('loop_weeks')).length).toBe(1)
  })
})

describe('a file that keeps stopping its worker', () => {
  it('is given up with a sentence after five attempts', async () => {
    const done = await upload(scratch.db, { text: csv({}) })
    await updateImport(scratch.db, done.id, { status: 'reading', attempts: 5 })
    const { readImport } = await import('../../../server/services/imports/readImport')
    await readImport(scratch.db, done.id, { dataDir: '/nowhere' })
    expect(await findImport(scratch.db, done.id)).toMatchObject({ status: 'failed', error: expect.stringMatching(/5 times/) })
  })
})
