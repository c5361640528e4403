import type { TrendBlock } from '../../db/blocks/types'
import { loopRecord } from '../services/assessments/loopRecord'
import { loopWeekColumns } from '../services/assessments/loopWeekColumns'
import { rehearse } from '../services/assessments/rehearse'
import { assessLoopWeek } from '../../shared/assessment/assessLoopWeek'
import type { LoopSetup, TimeSpan, WeekFrame } from '../../shared/assessment/types'
import { weekFrame } from '../../shared/assessment/week/isoWeek'

export interface AssessTask { setup: LoopSetup, version: number, week: string, zone: string, outages: TimeSpan[], blocks: TrendBlock[] }
export interface AssessAnswer { columns: Record<string, unknown>, detail: string }

const frames = new Map<string, WeekFrame>()

/** One loop-week, decoded and assessed in a thread. The detail goes back as text: the worker only passes it on. */
export default function assess({ setup, version, week, zone, outages, blocks }: AssessTask): AssessAnswer {
  const key = `${week} ${zone}`
  let frame = frames.get(key)
  if (!frame) frames.set(key, frame = weekFrame(week, zone))
  const edges = frame.hourEdges
  const assessment = assessLoopWeek(loopRecord(blocks, edges[0], edges[edges.length - 1], setup.normalModes), setup, frame, outages)
  return { columns: loopWeekColumns(assessment, { priority: setup.priority, version, weekStartMs: edges[0] }), detail: JSON.stringify(assessment).replaceAll('\\u0000', '') }
}

/** Before the first loop-week of a fresh thread, where there is time for it. */
export function getReady(rounds: number): void {
  rehearse(rounds)
}
