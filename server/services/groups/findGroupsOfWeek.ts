import type { Knex } from 'knex'
import { listHuntingLoops, replaceGroups } from '../../../db/repositories/groups'
import { listBlocks } from '../../../db/repositories/trendBlocks'
import { candidatesOfLoop } from '../../../shared/assessment/groups/candidatesOfLoop'
import { findGroups, type GroupCandidate } from '../../../shared/assessment/groups/findGroups'
import { weekFrame } from '../../../shared/assessment/week/isoWeek'
import { formatDuration } from '../../../shared/format/duration'
import { loopRecord } from '../assessments/loopRecord'
import { getSettings } from '../settings'

const LOOPS_AT_ONCE = 50

const letterOf = (k: number): string => (k < 26 ? String.fromCharCode(65 + k) : letterOf(Math.floor(k / 26) - 1) + letterOf(k % 26))

/** Loops that hunt together in a week, over the whole fleet. Runs again without harm: it puts the new groups in place of the old. */
export async function findGroupsOfWeek(trx: Knex.Transaction, week: string): Promise<void> {
  const { zone } = await getSettings(trx)
  const edges = weekFrame(week, zone).hourEdges
  const span = { fromMs: edges[0]!, toMs: edges[edges.length - 1]! }
  const hunting = await listHuntingLoops(trx, week)
  const candidates: GroupCandidate[] = []
  for (let at = 0; at < hunting.length; at += LOOPS_AT_ONCE) {
    const part = hunting.slice(at, at + LOOPS_AT_ONCE)
    const blocks = await listBlocks(trx, part.map(l => l.loopId), span.fromMs, span.toMs)
    for (const loop of part) candidates.push(...candidatesOfLoop(loop, loopRecord(blocks.filter(b => b.loopId === loop.loopId), span.fromMs, span.toMs, []), span))
  }
  const idOf = new Map(hunting.map(l => [l.tag, l.loopId]))
  const groups = findGroups(candidates, span)
  await replaceGroups(trx, week, groups.map((g, k) => ({
    letter: letterOf(k), periodS: g.periodS, likelySource: idOf.get(g.likelySource)!,
    evidence: [`${g.members.length} loops share a period of ${formatDuration(g.periodS)} and keep a steady phase.`, ...g.members[0]!.reasons.map(r => `${g.likelySource}: ${r}.`)],
    members: g.members.map(m => ({ loopId: idOf.get(m.tag)!, strength: m.strength, lagS: m.lagS, rank: m.rank, score: m.score, reasons: m.reasons })),
  })))
}
