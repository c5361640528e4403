import { parse } from 'csv-parse/sync'
import type { Knex } from 'knex'
import { ensureAreas } from '../../../db/repositories/areas'
import { insertAudit } from '../../../db/repositories/audit'
import { insertLoops, listLoops, updateLoop, type LoopConfig, type LoopRow } from '../../../db/repositories/loops'
import { listLoopWeekKeys } from '../../../db/repositories/loopWeekWrites'
import { insertTuningRecord, listTuningRecords } from '../../../db/repositories/tuningRecords'
import { requestAssessments } from '../assessments/requestAssessments'
import { typeOfTag } from '../imports/guessLoop'
import { normaliseMode } from '../imports/scan/cells'
import { Refusal } from '../refusal'
import { TUNING_FIELDS, UNASSESSED_FIELDS } from './setupFields'

export interface RowProblem { line: number, tag: string, column: string, value: string, message: string }
export interface LoopListAnswer {
  rows: number
  created: number
  changed: number
  unchanged: number
  /** loop-weeks that are assessed again */
  reassessed: number
  unknownColumns: string[]
  errors: RowProblem[]
  changes: { tag: string, created: boolean, fields: Record<string, { from: unknown, to: unknown }> }[]
  /** loops whose tuning or range came in changed although nobody had recorded a change here */
  unrecorded: { tag: string, what: 'tuning' | 'range' }[]
}

const RANGE = ['pvLow', 'pvHigh', 'opLow', 'opHigh'] as const
const MOST_CHANGES = 2000

type Cell = { text: string, number: () => number }
class Problem extends Error {}

const positive = (c: Cell) => above(c, 0, 'must be above 0')
const notNegative = (c: Cell) => { const v = c.number(); if (v < 0) throw new Problem('must not be below 0'); return v }
const above = (c: Cell, low: number, message: string) => { const v = c.number(); if (!(v > low)) throw new Problem(message); return v }
function oneOf<const T extends string>(values: readonly T[], c: Cell): T {
  const bare = (x: string) => x.toLowerCase().replace(/[\s_-]/g, '')
  const found = values.find(v => bare(v) === bare(c.text))
  if (!found) throw new Problem(`must be one of ${values.join(', ')}`)
  return found
}
// tags may hold blanks, so a blank parts them only where no other mark does
const list = (text: string) => text.split(/[;|,]/.test(text) ? /[;|,]+/ : /\s+/).map(x => x.trim()).filter(Boolean)

/** Column (compared without case, blanks, `_`) -> what it sets. Times of the tuning are in `timeUnit`, all others in seconds. */
const COLUMNS: Record<string, (c: Cell) => Partial<LoopConfig>> = {
  description: c => ({ description: c.text.slice(0, 300) }),
  unit: c => ({ unit: c.text.slice(0, 100) }),
  type: c => ({ type: oneOf(['flow', 'pressure', 'level', 'temperature', 'analysis', 'other'], c) }),
  pvlow: c => ({ pvLow: c.number(), rangeGuessed: false }),
  pvhigh: c => ({ pvHigh: c.number(), rangeGuessed: false }),
  pvunit: c => ({ pvUnit: c.text.slice(0, 20) }),
  oplow: c => ({ opLow: c.number() }),
  ophigh: c => ({ opHigh: c.number() }),
  normalmodes: c => ({ normalModes: [...new Set(c.text.split(/[\s;|,/]+/).map(normaliseMode).filter(Boolean))] }),
  tolerance: c => ({ tolerance: positive(c) }),
  priority: (c) => {
    const v = c.number()
    if (v !== 1 && v !== 2 && v !== 3) throw new Problem('must be 1, 2 or 3')
    return { priority: v }
  },
  deadtime: c => ({ deadTimeS: notNegative(c) }),
  interval: c => ({ intervalS: positive(c) }),
  settling: c => ({ settlingS: positive(c) }),
  form: c => ({ form: oneOf(['ideal', 'series', 'parallel', 'onOff'], c) }),
  action: c => ({ action: oneOf(['direct', 'reverse'], c) }),
  gain: c => ({ gain: positive(c) }),
  gainunit: c => ({ gainUnit: oneOf(['gain', 'proportionalBand'], c) }),
  integraltime: c => ({ integralTime: notNegative(c) || null }),
  derivativetime: c => ({ derivativeTime: notNegative(c) }),
  timeunit: c => ({ timeUnit: oneOf(['s', 'min', 'repeatsPerMin'], c) }),
  filtertime: c => ({ filterTimeS: notNegative(c) }),
  setpointweight: (c) => {
    const v = notNegative(c)
    if (v > 1) throw new Problem('must be 0 to 1')
    return { setpointWeight: v }
  },
  hysteresis: c => ({ hysteresis: notNegative(c) }),
  upstream: c => ({ upstream: list(c.text) }),
}
const bare = (header: string) => header.toLowerCase().replace(/[\s_-]/g, '')

interface Wanted { line: number, tag: string, area: string | null, config: Partial<LoopConfig> }

/** Creates and changes loops from a list. Rows that cannot be understood are reported one by one; the others go in. */
export async function importLoopList(db: Knex, bytes: Uint8Array, by: { userId: number | null, name: string }): Promise<LoopListAnswer> {
  const { rows, total, unknownColumns, errors } = readLoopList(bytes)
  return await db.transaction(async (trx) => {
    const known = new Map((await listLoops(trx)).map(l => [l.tag.toUpperCase(), l]))
    const areas = await ensureAreas(trx, rows.flatMap(r => r.area ? [r.area] : []))
    const answer: LoopListAnswer = { rows: total, created: 0, changed: 0, unchanged: 0, reassessed: 0, unknownColumns, errors, changes: [], unrecorded: [] }
    const fresh: ({ tag: string } & Partial<LoopConfig>)[] = []
    const assess: number[] = []
    for (const { line, tag, area, config } of rows) {
      if (area) config.areaId = areas.get(area)!
      const loop = known.get(tag.toUpperCase())
      const problem = clash(config, loop)
      if (problem) {
        errors.push({ line, tag, ...problem })
        continue
      }
      if (!loop) {
        fresh.push({ tag, type: typeOfTag(tag), ...config })
        answer.created++
        if (answer.changes.length < MOST_CHANGES) answer.changes.push({ tag, created: true, fields: {} })
        continue
      }
      const changed = (Object.keys(config) as (keyof LoopConfig)[]).filter(key => JSON.stringify(config[key]) !== JSON.stringify(loop[key]))
      if (changed.length === 0) {
        answer.unchanged++
        continue
      }
      const change = Object.fromEntries(changed.map(key => [key, config[key]])) as Partial<LoopConfig>
      await updateLoop(trx, loop.id, change)
      const retuned = TUNING_FIELDS.some(key => changed.includes(key))
      // what was never said before is a first statement, not a change
      const unrecordedTuning = retuned && loop.gain !== null && !await wasRecorded(trx, loop.id)
      if (retuned) await keepTuning(trx, loop.id, { ...loop, ...change }, by, unrecordedTuning)
      if (unrecordedTuning) answer.unrecorded.push({ tag: loop.tag, what: 'tuning' })
      const ranged = RANGE.filter(key => changed.includes(key) && loop[key] !== null)
      if (ranged.length && !loop.rangeGuessed) {
        answer.unrecorded.push({ tag: loop.tag, what: 'range' })
        await insertTuningRecord(trx, { loopId: loop.id, ticketId: null, userId: by.userId, actor: by.name, kind: 'unrecorded', tuning: Object.fromEntries(ranged.map(key => [key, change[key] as number])), reason: `The range came in changed by a loop list (before: ${ranged.map(key => `${key} ${loop[key]}`).join(', ')}); figures in per cent of span change with it.`, changeNumber: null })
      }
      if (changed.some(key => !UNASSESSED_FIELDS.has(key))) assess.push(loop.id)
      answer.changed++
      const shown = Object.fromEntries(changed.map(key => key === 'areaId' ? ['area', { from: loop.area, to: area }] : [key, { from: loop[key], to: config[key] }]))
      if (answer.changes.length < MOST_CHANGES) answer.changes.push({ tag: loop.tag, created: false, fields: shown })
      await insertAudit(trx, { userId: by.userId, actor: by.name, action: 'loop.change', entity: 'loop', entityId: loop.tag, data: shown })
    }
    const ids = await insertLoops(trx, fresh)
    for (const loop of fresh) if (loop.gain != null || loop.hysteresis != null) await keepTuning(trx, ids.get(loop.tag)!, loop, by)
    if (fresh.length) await insertAudit(trx, { userId: by.userId, actor: by.name, action: 'loops.create', entity: 'loops', data: { tags: fresh.map(l => l.tag).slice(0, 500), count: fresh.length } })
    if (assess.length) answer.reassessed = await requestAssessments(trx, await listLoopWeekKeys(trx, { loopIds: assess }), 'loop list imported')
    return answer
  })
}

async function keepTuning(trx: Knex.Transaction, loopId: number, source: Partial<LoopConfig>, by: { userId: number | null, name: string }, unrecorded = false): Promise<void> {
  const tuning = Object.fromEntries(TUNING_FIELDS.flatMap(key => source[key] === undefined ? [] : [[key, source[key] as string | number | null]]))
  await insertTuningRecord(trx, { loopId, ticketId: null, userId: by.userId, actor: by.name, kind: unrecorded ? 'unrecorded' : 'imported', tuning, reason: unrecorded ? 'The tuning came in changed by a loop list; nobody had recorded a change.' : 'Loop list imported.', changeNumber: null })
}

/** Whether somebody recorded a tuning as left since the set-up was last stated by a list. */
async function wasRecorded(trx: Knex.Transaction, loopId: number): Promise<boolean> {
  // newest first
  for (const record of await listTuningRecords(trx, loopId)) {
    if (record.kind === 'asLeft') return true
    if (record.kind === 'imported' || record.kind === 'unrecorded') return false
  }
  return false
}

function clash(config: Partial<LoopConfig>, loop: LoopRow | undefined): Omit<RowProblem, 'line' | 'tag'> | null {
  const pick = (key: 'pvLow' | 'pvHigh' | 'opLow' | 'opHigh', other: number | null) => config[key] !== undefined ? config[key] : loop ? loop[key] : other
  const [low, high, opLow, opHigh] = [pick('pvLow', null), pick('pvHigh', null), pick('opLow', 0), pick('opHigh', 100)]
  if (low !== null && high !== null && !(low! < high!)) return { column: 'pvHigh', value: String(high), message: 'must be above pvLow' }
  if (!(opLow! < opHigh!)) return { column: 'opHigh', value: String(opHigh), message: 'must be above opLow' }
  return null
}

function decodeText(bytes: Uint8Array): string {
  if (bytes[0] === 0xFF && bytes[1] === 0xFE) return new TextDecoder('utf-16le').decode(bytes)
  if (bytes[0] === 0xFE && bytes[1] === 0xFF) return new TextDecoder('utf-16be').decode(bytes)
  try { return new TextDecoder('utf-8', { fatal: true }).decode(bytes) }
  catch { return new TextDecoder('windows-1252').decode(bytes) }
}

function readLoopList(bytes: Uint8Array): { rows: Wanted[], total: number, unknownColumns: string[], errors: RowProblem[] } {
  const text = decodeText(bytes)
  if (text.includes('\0')) throw new Refusal(422, 'invalid_input', 'The list holds the character NUL; it is no text file, or it was damaged.', { issues: [{ path: '', message: 'holds the character NUL' }] })
  const header = text.split(/\r?\n/).find(line => line.trim() !== '') ?? ''
  const delimiter = [',', ';', '\t', '|'].reduce((best, d) => header.split(d).length > header.split(best).length ? d : best)
  let records: { record: string[], info: { lines: number } }[]
  try {
    records = parse(text, { delimiter, bom: true, relax_column_count: true, relax_quotes: true, skip_empty_lines: true, trim: true, info: true }) as never
  }
  catch (error) { throw new Refusal(422, 'invalid_input', `The list cannot be read: ${(error as Error).message}`, { issues: [{ path: '', message: 'not readable as CSV' }] }) }
  const names = records[0]?.record.map(bare) ?? []
  if (!names.includes('tag')) throw new Refusal(422, 'invalid_input', 'The list needs a header with a column named tag.', { issues: [{ path: 'tag', message: 'column is missing' }] })
  const unknownColumns = records[0].record.filter((name, i) => name !== '' && names[i] !== 'tag' && names[i] !== 'area' && !(names[i] in COLUMNS))
  const rows: Wanted[] = []
  const errors: RowProblem[] = []
  const seen = new Set<string>()
  for (const { record, info } of records.slice(1)) {
    const tag = record[names.indexOf('tag')] ?? ''
    const problems: RowProblem[] = []
    const problem = (column: string, value: string, message: string) => problems.push({ line: info.lines, tag, column, value: value.slice(0, 100), message })
    if (tag === '') problem('tag', '', 'is missing')
    else if (tag.length > 80) problem('tag', tag, 'is longer than 80 characters')
    else if (seen.has(tag.toUpperCase())) problem('tag', tag, 'stands in the list twice')
    seen.add(tag.toUpperCase())
    let config: Partial<LoopConfig> = {}
    names.forEach((name, i) => {
      const cell = record[i] ?? ''
      if (cell === '' || !(name in COLUMNS)) return
      const number = () => {
        const said = delimiter === ',' ? cell : cell.replace(',', '.')
        if (!/^[+-]?(\d+\.?\d*|\.\d+)(e[+-]?\d+)?$/i.test(said) || !Number.isFinite(Number(said))) throw new Problem('is not a number')
        return Number(said)
      }
      try { config = { ...config, ...COLUMNS[name]({ text: cell, number }) } }
      catch (error) {
        if (!(error instanceof Problem)) throw error
        problem(records[0].record[i], cell, error.message)
      }
    })
    if (config.filterTimeS && config.timeUnit && config.timeUnit !== 's') config.filterTimeS *= 60
    if (problems.length) errors.push(...problems)
    else rows.push({ line: info.lines, tag, area: record[names.indexOf('area')]?.slice(0, 100) || null, config })
  }
  return { rows, total: records.length - 1, unknownColumns, errors }
}
