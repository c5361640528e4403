import type { Database } from '../../../db/knex'
import { findLoop } from '../../../db/repositories/loops'
import { listOutagesOf } from '../../../db/repositories/loopWeekWrites'
import { listBlocks } from '../../../db/repositories/trendBlocks'
import { weekFrame } from '../../../shared/assessment/week/isoWeek'
import type { FindModelInput } from '../../../shared/schemas/tuning'
import type { ModelAnswer } from '../../../shared/types/tuning'
import type { FitTask } from '../../threads/fitModel'
import { loopSetup } from '../loops/loopSetup'
import { Refusal } from '../refusal'
import { getSettings } from '../settings'
import { fitInThread } from './fitThread'

const MOST_DAYS = 43

/** Stretches of the weeks asked for, and what they say about the process. */
export async function findModel(db: Database, tag: string, input: FindModelInput, fit: (task: FitTask) => Promise<ModelAnswer> = fitInThread): Promise<ModelAnswer> {
  const loop = await findLoop(db, tag)
  if (!loop) throw new Refusal(404, 'not_found', `There is no loop named ${tag}.`)
  const settings = await getSettings(db)
  const fromMs = weekFrame(input.fromWeek, settings.zone).hourEdges[0]
  const { hourEdges } = weekFrame(input.toWeek, settings.zone)
  const toMs = hourEdges[hourEdges.length - 1]
  if (toMs - fromMs > MOST_DAYS * 86_400_000) throw new Refusal(422, 'invalid_input', 'At most six weeks can be looked at together.', { issues: [{ path: 'toWeek', message: 'at most six weeks from the first' }] })
  const [blocks, outages] = [await listBlocks(db, [loop.id], fromMs, toMs), await listOutagesOf(db, fromMs, toMs)]
  return fit({ setup: loopSetup(loop, settings), outages: outages.filter(o => o.areaId === null || o.areaId === loop.areaId).map(({ fromMs, toMs }) => ({ fromMs, toMs })), blocks, fromMs, toMs, chosen: input.stretches ?? null })
}
