import type { Knex } from 'knex'
import { up as people } from './001-people'
import { up as site } from './002-site'
import { up as imports } from './003-imports'
import { up as trends } from './004-trends'
import { up as assessments } from './005-assessments'
import { up as tickets } from './006-tickets'
import { up as mail } from './007-mail'
import { up as tuning } from './008-tuning'
import { up as assessmentsDue } from './009-assessments-due'
import { up as ticketWork } from './010-ticket-work'

/** In order. Never edited once landed: add one at the end. */
export const migrations: { name: string, up: (db: Knex) => Promise<void> }[] = [
  { name: '001-people', up: people },
  { name: '002-site', up: site },
  { name: '003-imports', up: imports },
  { name: '004-trends', up: trends },
  { name: '005-assessments', up: assessments },
  { name: '006-tickets', up: tickets },
  { name: '007-mail', up: mail },
  { name: '008-tuning', up: tuning },
  { name: '009-assessments-due', up: assessmentsDue },
  { name: '010-ticket-work', up: ticketWork },
]
