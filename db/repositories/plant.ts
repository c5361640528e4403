import type { Database } from '../knex'
import type { DueTicket } from '../../shared/types/plant'

/** Tickets in work that are due up to a day (`2026-11-22`), soonest first. `today` decides what is overdue. */
export async function listDueTickets(db: Database, today: string, upTo: string): Promise<DueTicket[]> {
  const { rows } = await db.raw(`
    select t.id, t.title, t.state, to_char(t.due_on, 'YYYY-MM-DD') as "dueOn", u.name as assignee, t.due_on < :today::date as overdue,
      coalesce((select array_agg(l.tag order by tl.position) from ticket_loops tl join loops l on l.id = tl.loop_id where tl.ticket_id = t.id), '{}') as loops
    from tickets t left join users u on u.id = t.assignee_id
    where t.state not in ('closed', 'dropped') and t.due_on <= :upTo::date
    order by t.due_on, t.priority, t.id limit 50`, { today, upTo })
  return rows
}

export async function countOpenTickets(db: Database): Promise<number> {
  const { rows } = await db.raw(`select count(*)::int as n from tickets where state not in ('closed', 'dropped')`)
  return rows[0].n
}
