import type { Database } from '../../../db/knex'
import { findBlockSpan } from '../../../db/repositories/trendBlocks'
import { findLoop } from '../../../db/repositories/loops'
import { listFleetGroups, listLoopWeeks } from '../../../db/repositories/loopWeeks'
import { findLoopWeek, findShelving, listConcerns, listEarlierAssessments, listSetAsides, listWeeksOfLoop } from '../../../db/repositories/loopPage'
import { listTickets } from '../../../db/repositories/tickets'
import { listTuningRecords } from '../../../db/repositories/tuningRecords'
import { previousWeek, weekFrame } from '../../../shared/assessment/week/isoWeek'
import { fleetQuerySchema } from '../../../shared/schemas/fleet'
import { Refusal } from '../refusal'
import { getSettings } from '../settings'

/** Everything that a loop's page shows of one week: the row, the whole assessment, set-up, tuning record, tickets, weeks. */
export async function readLoop(db: Database, tag: string, asked: string | undefined, now: Date) {
  const loop = await findLoop(db, tag)
  if (!loop) throw new Refusal(404, 'not_found', `There is no loop named ${tag}.`)
  const [settings, weeks] = await Promise.all([getSettings(db), listWeeksOfLoop(db, loop.id)])
  const week = asked ?? weeks[weeks.length - 1]?.week ?? null
  const [assessed, ranked, groups, tuning, tickets, setAsides, shelving, concerns, earlier, span] = await Promise.all([
    week ? findLoopWeek(db, loop.id, week) : null,
    week ? listLoopWeeks(db, { ...fleetQuerySchema.parse({ search: tag }), week, weekBefore: previousWeek(week), now }) : null,
    week ? listFleetGroups(db, week) : [],
    listTuningRecords(db, loop.id), listTickets(db, { loopTag: tag }), listSetAsides(db, loop.id), findShelving(db, loop.id, now),
    listConcerns(db, loop.id), listEarlierAssessments(db, loop.id), findBlockSpan(db, loop.id),
  ])
  const frame = week ? weekFrame(week, settings.zone) : null
  const row = ranked?.rows.find(r => r.tag === tag) ?? null
  return {
    ...row, tag, week, groupOf: groups.find(g => g.letter === row?.group) ?? null, zone: settings.zone,
    weekFrom: frame ? frame.hourEdges[0] : null, weekTo: frame ? frame.hourEdges[frame.hourEdges.length - 1] : null,
    configuration: loop, settings: { toleranceByType: settings.toleranceByType, settlingByType: settings.settlingByType },
    assessment: assessed?.detail ?? null,
    evidence: assessed?.detail.evidence ?? [], responses: assessed?.detail.responses ?? [],
    assessedAt: assessed?.assessedAt ?? null, methodVersion: assessed?.methodVersion ?? null, assessedWithVersion: assessed?.loopVersion ?? null,
    changeMark: assessed?.changeMark ?? null, changeSince: assessed?.changeSince ?? null,
    weeks, earlier, tuning, tickets: tickets.rows.map(t => ({ id: t.id, title: t.title, state: t.state, assignee: t.assignee, dueOn: t.dueOn, outcome: t.outcome, closedAt: t.closedAt })),
    setAsides, shelving, concerns, dataFrom: span?.first ?? null, dataTo: span?.last ?? null,
  }
}
