import type { Database } from '../../../db/knex'
import { listAreaNames, listDigestGroups, listDigestLoops, listDigestSlideBacks, listDigestTickets, listDigestWins, lostHoursByState } from '../../../db/repositories/digests'
import { previousWeek } from '../../../shared/assessment/week/isoWeek'
import type { DigestLoop, DigestModel } from '../../../shared/digest/model'
import { dayIn } from '../../../shared/format/dayIn'
import { getSettings } from '../settings'

const WORST = 10
const BETTER = 5
const DAY_MS = 86_400_000

/** A loop is news when it lost hours and is new in the list, worse by at least four hours, or got another verdict. */
function isNews(l: DigestLoop & { lostBefore: number | null, verdictBefore: string | null }): boolean {
  if (l.lostHours < 4) return false
  return l.lostBefore === null || l.lostHours - l.lostBefore >= 4 || l.verdict !== l.verdictBefore
}

/** The figures of one person's digest for a week, for the areas followed (all when empty). */
export async function buildDigest(db: Database, { week, areaIds, publicUrl, now }: { week: string, areaIds: number[], publicUrl: string, now: Date }): Promise<DigestModel> {
  const settings = await getSettings(db)
  const today = dayIn(settings.zone, now)
  const inAWeek = dayIn(settings.zone, now.getTime() + 7 * DAY_MS)
  // tickets close and slide back in the days before the mail, not in the days that it reports on
  const since = new Date(now.getTime() - 7 * DAY_MS)
  // one after the other: inside a transaction there is one connection
  const loops = await listDigestLoops(db, week, previousWeek(week), areaIds)
  const groups = await listDigestGroups(db, week, areaIds)
  const tickets = await listDigestTickets(db, areaIds, today, inAWeek)
  const wins = await listDigestWins(db, areaIds, since, now)
  const slidBack = await listDigestSlideBacks(db, areaIds, since, now)
  const areas = await listAreaNames(db, areaIds)
  const known = loops.filter(l => l.lostBefore !== null)
  const lostHours = loops.reduce((sum, l) => sum + l.lostHours, 0)
  return {
    siteName: settings.siteName, week, zone: settings.zone, areas, loops: loops.length, lostHours,
    change: known.length ? known.reduce((sum, l) => sum + l.lostHours - l.lostBefore!, 0) : null,
    byState: lostHoursByState(loops),
    worst: loops.filter(isNews).sort((a, b) => b.lostHours - a.lostHours).slice(0, WORST),
    better: loops.filter(l => (l.change ?? 0) <= -8).sort((a, b) => a.change! - b.change!).slice(0, BETTER),
    groups, tickets, wins, slidBack, publicUrl,
  }
}
