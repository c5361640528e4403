import { encodeBlock } from '../../db/blocks/encodeBlock'
import { DAY_MS, type TrendBlock } from '../../db/blocks/types'
import { simulateDemoLoop, type DemoWeeks } from '../../db/seeds/demo/tarnHollow'
import { assessLoopWeek } from '../../shared/assessment/assessLoopWeek'
import type { LoopSetup, TimeSpan } from '../../shared/assessment/types'
import { weekFrame, weeksBetween } from '../../shared/assessment/week/isoWeek'
import { loopWeekColumns } from '../services/assessments/loopWeekColumns'

export interface SeedTask { index: number, loopId: number, setup: LoopSetup, version: number, weeks: DemoWeeks, outages: TimeSpan[] }
export interface SeedAnswer { blocks: TrendBlock[], weeks: { week: string, columns: Record<string, unknown>, detail: string }[] }

/** One loop of the demo plant: its samples as blocks, its weeks assessed. */
export default function seedLoop({ index, loopId, setup, version, weeks, outages }: SeedTask): SeedAnswer {
  const record = simulateDemoLoop(index, weeks)
  const { t } = record
  const blocks: TrendBlock[] = []
  for (let from = 0; from < t.length;) {
    const end = (Math.floor(t[from] / DAY_MS) + 1) * DAY_MS
    let to = from + 1
    while (to < t.length && t[to] < end) to++
    blocks.push(encodeBlock(loopId, record, from, to))
    from = to
  }
  const ids = t.length ? weeksBetween(t[0], t[t.length - 1] + 1, weeks.zone) : []
  return {
    blocks,
    weeks: ids.map((week) => {
      const frame = weekFrame(week, weeks.zone)
      const assessment = assessLoopWeek(record, setup, frame, outages)
      return { week, columns: loopWeekColumns(assessment, { priority: setup.priority, version, weekStartMs: frame.hourEdges[0] }), detail: JSON.stringify(assessment) }
    }),
  }
}
