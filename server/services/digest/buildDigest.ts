import type { Database } from '../../../db/knex'
import { listAreaNames, listDigestGroups, listDigestLoops, listDigestTickets, listDigestWins, lostHoursByState } from '../../../db/repositories/digests'
import { previousWeek, weekFrame } from '../../../shared/assessment/week/isoWeek'
import type { DigestLoop, DigestModel } from '../../../shared/digest/model'
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
  const frame = weekFrame(week, settings.zone)
  const begin = new Date(frame.hourEdges[0]!)
  const end = new Date(frame.hourEdges[frame.hourEdges.length - 1]!)
  const today = new Intl.DateTimeFormat('sv-SE', { timeZone: settings.zone, dateStyle: 'short' }).format(now)
  const inAWeek = new Intl.DateTimeFormat('sv-SE', { timeZone: settings.zone, dateStyle: 'short' }).format(now.getTime() + 7 * DAY_MS)
  const [loops, groups, tickets, wins, areas] = await Promise.all([
    listDigestLoops(db, week, previousWeek(week), areaIds), listDigestGroups(db, week), listDigestTickets(db, areaIds, today, inAWeek), listDigestWins(db, areaIds, begin, end), listAreaNames(db, areaIds),
  ])
  const known = loops.filter(l => l.lostBefore !== null)
  const lostHours = loops.reduce((sum, l) => sum + l.lostHours, 0)
  return {
    siteName: settings.siteName, week, zone: settings.zone, areas, loops: loops.length, lostHours,
    lostHoursBefore: known.length ? known.reduce((sum, l) => sum + l.lostBefore!, 0) : null,
    byState: lostHoursByState(loops),
    worst: loops.filter(isNews).sort((a, b) => b.lostHours - a.lostHours).slice(0, WORST),
    better: loops.filter(l => (l.change ?? 0) <= -8).sort((a, b) => a.change! - b.change!).slice(0, BETTER),
    groups, tickets, wins, publicUrl,
  }
}
