import type { Database } from '../knex'
import { LEDGER_STATES } from '../../shared/assessment/types'
import type { FleetQuery } from '../../shared/schemas/fleet'
import { FLEET_MEASURES, type FleetGroup, type FleetSummary, type LoopRow, type WeekItem } from '../../shared/types/fleet'

const snake = (name: string) => name.replace(/[A-Z]/g, letter => `_${letter.toLowerCase()}`)
const column = (measure: string) => `w."${snake(measure)}"`

/** What each key of a row is in SQL. The keys are checked before they get here; this list is what keeps SQL out of them. */
const expressions: Record<string, string> = {
  tag: 'l.tag', description: 'l.description', area: `coalesce(a.name, '')`, unit: 'l.unit', type: 'l.type', priority: 'l.priority', pvUnit: 'l.pv_unit', form: 'l.form',
  verdict: 'w.verdict', confidence: 'w.confidence', lostHours: 'w.lost_hours', weightedLostHours: 'w.weighted_lost_hours',
  change: 'w.weighted_lost_hours - before.weighted_lost_hours', hours: 'w.hours', ribbon: 'w.ribbon', group: 'g.letter', openTicket: 't.id', openTicketState: 't.state',
  setAside: `case when s.until_at is not null then jsonb_build_object('until', s.until_at, 'reason', s.reason) end`,
  ...Object.fromEntries(FLEET_MEASURES.map(m => [m, column(m)])),
}

const joins = `
  from loop_weeks w
  join loops l on l.id = w.loop_id
  left join areas a on a.id = l.area_id
  left join loop_weeks before on before.loop_id = w.loop_id and before.week = :weekBefore
  left join (select m.loop_id, min(lg.letter) as letter from loop_groups lg join loop_group_members m on m.group_id = lg.id where lg.week = :week group by m.loop_id) g on g.loop_id = w.loop_id
  left join (select distinct on (tl.loop_id) tl.loop_id, tk.id, tk.state from tickets tk join ticket_loops tl on tl.ticket_id = tk.id
             where tk.state not in ('closed', 'dropped') order by tl.loop_id, tk.id desc) t on t.loop_id = w.loop_id
  left join (select distinct on (loop_id) loop_id, until_at, reason from set_asides where until_at > :now and ended_at is null order by loop_id, until_at desc) s on s.loop_id = w.loop_id`

type Bindings = Record<string, string | number | Date | string[] | number[]>

function conditions(q: FleetQuery, bindings: Bindings): string {
  const wanted = ['w.week = :week']
  const anyOf = (key: 'area' | 'type' | 'verdict' | 'priority' | 'group', sql: string, cast = 'text') => {
    if (!q[key].length) return
    bindings[key] = q[key] as string[]
    wanted.push(`${sql} = any(:${key}::${cast}[])`)
  }
  anyOf('area', expressions.area)
  anyOf('type', 'l.type')
  anyOf('verdict', 'w.verdict')
  anyOf('priority', 'l.priority', 'int')
  anyOf('group', 'g.letter')
  if (q.state.length) wanted.push(`(${q.state.map(state => `(w.hours->>'${state}')::int > 0`).join(' or ')})`)
  if (q.search) {
    bindings.search = `%${q.search.replace(/[\\%_]/g, '\\$&')}%`
    wanted.push(`(l.tag ilike :search or l.description ilike :search or l.unit ilike :search or a.name ilike :search)`)
  }
  if (q.lostOver !== undefined) {
    bindings.lostOver = q.lostOver
    wanted.push('w.lost_hours > :lostOver')
  }
  if (q.ticket) wanted.push(`t.id is ${q.ticket === 'with' ? 'not null' : 'null'}`)
  if (q.setAside === 'only' || q.setAside === 'exclude') wanted.push(`s.until_at is ${q.setAside === 'only' ? 'not null' : 'null'}`)
  return wanted.join(' and ')
}

function order(q: FleetQuery): string {
  const keys = q.sort.length ? q.sort : ['-weightedLostHours']
  const terms = keys.map((key) => {
    const name = key.replace(/^-/, '')
    const sql = name.startsWith('hours.') ? `(w.hours->>'${name.slice(6)}')::int` : expressions[name]
    // what cannot be told stands last in both directions: it is neither the best nor the worst
    return `${sql} ${key.startsWith('-') ? 'desc' : 'asc'} nulls last`
  })
  if (q.setAside === 'last') terms.unshift('(s.until_at is not null)')
  return [...terms, 'l.tag'].join(', ')
}

/**
 * Loop-weeks of one week with their loop, group, ticket and the week before, filtered, sorted and cut, and the sums
 * over all that the filters let through: one statement, so that rows and sums never disagree.
 */
export async function listLoopWeeks(db: Database, q: FleetQuery & { week: string, weekBefore: string, now: Date }): Promise<{ rows: LoopRow[], summary: FleetSummary }> {
  const bindings: Bindings = { week: q.week, weekBefore: q.weekBefore, now: q.now, offset: q.offset }
  const where = conditions(q, bindings)
  if (q.limit !== undefined) bindings.limit = q.limit
  const keys = Object.entries(expressions).map(([key, sql]) => `${sql} as "${key}"`).join(', ')
  const hours = LEDGER_STATES.map(state => `'${state}', coalesce(sum((w.hours->>'${state}')::int), 0)`).join(', ')
  const { rows: [answer] } = await db.raw(`
    select
      (select coalesce(json_agg(page), '[]') from (
        select ${keys}, case when w.verdict = 'cannotTell' then w.detail->>'verdictReason' end as reason
        ${joins} where ${where} order by ${order(q)} offset :offset ${q.limit === undefined ? '' : 'limit :limit'}) page) as rows,
      (select json_build_object('loops', count(*), 'lostHours', coalesce(sum(w.lost_hours), 0), 'change', sum(w.lost_hours - before.lost_hours),
        'overTwenty', count(*) filter (where w.lost_hours > 20), 'setAside', count(s.until_at), 'hours', json_build_object(${hours}))
        ${joins} where ${where}) as summary`, bindings)
  return { rows: answer.rows.map(toRow), summary: answer.summary }
}

// json_agg writes times with an offset; everything that leaves here is in UTC with Z
const toRow = (row: LoopRow): LoopRow => (row.setAside ? { ...row, setAside: { ...row.setAside, until: new Date(row.setAside.until).toISOString() } } : row)

/** Groups of loops that oscillate together in a week, largest first. */
export async function listFleetGroups(db: Database, week: string): Promise<FleetGroup[]> {
  const { rows } = await db.raw(`
    select g.letter, g.period_s as period, count(m.loop_id)::int as members, l.tag as "likelySource"
    from loop_groups g left join loop_group_members m on m.group_id = g.id left join loops l on l.id = g.likely_source
    where g.week = ? group by g.id, l.tag order by count(m.loop_id) desc, g.letter`, [week])
  return rows
}

/** Weeks that were assessed, newest first. */
export async function listWeeks(db: Database): Promise<WeekItem[]> {
  const { rows } = await db.raw(`select week, count(*)::int as loops, sum(lost_hours)::int as "lostHours" from loop_weeks group by week order by week desc`)
  return rows
}

export async function findLatestWeek(db: Database): Promise<string | null> {
  const { rows } = await db.raw('select max(week) as week from loop_weeks')
  return rows[0].week
}

/** Loops that have no record in a week. */
export async function countLoopsWithout(db: Database, week: string): Promise<number> {
  const { rows } = await db.raw('select count(*)::int as n from loops l where not exists (select from loop_weeks w where w.loop_id = l.id and w.week = ?)', [week])
  return rows[0].n
}

/** All loops of a week for the plant page: no more than it draws. */
export interface PlantLoopWeek { tag: string, area: string, position: number, ribbon: string, hours: LoopRow['hours'], lostHours: number, weightedLostHours: number, lostHoursBefore: number | null, hoursBefore: LoopRow['hours'] | null }
export async function listPlantLoopWeeks(db: Database, week: string, weekBefore: string): Promise<PlantLoopWeek[]> {
  const { rows } = await db.raw(`
    select l.tag, coalesce(a.name, '') as area, coalesce(a.position, 1000000) as position, w.ribbon, w.hours, w.lost_hours as "lostHours",
      w.weighted_lost_hours as "weightedLostHours", before.lost_hours as "lostHoursBefore", before.hours as "hoursBefore"
    from loop_weeks w join loops l on l.id = w.loop_id left join areas a on a.id = l.area_id
    left join loop_weeks before on before.loop_id = w.loop_id and before.week = :weekBefore
    where w.week = :week order by position, area, l.tag`, { week, weekBefore })
  return rows
}
