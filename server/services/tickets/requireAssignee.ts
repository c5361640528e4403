import type { Database } from '../../../db/knex'
import { findUser } from '../../../db/repositories/users'
import { atLeast } from '../../../shared/types/people'
import { Refusal } from '../refusal'

/** A ticket is given only to people who can work on it. */
export async function requireAssignee(db: Database, id: number): Promise<void> {
  const person = await findUser(db, id)
  if (!person || person.disabledAt || !atLeast(person.role, 'technician')) throw new Refusal(422, 'invalid_input', 'This person cannot take a ticket.', { issues: [{ path: 'assigneeId', message: 'not a technician or engineer' }] })
}
