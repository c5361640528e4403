import type { TrendBlock } from '../../db/blocks/types'
import { loopRecord } from '../services/assessments/loopRecord'
import { fitLoop } from '../services/tuning/fitLoop'
import type { LoopSetup, TimeSpan } from '../../shared/assessment/types'
import type { ModelAnswer } from '../../shared/types/tuning'

export interface FitTask { setup: LoopSetup, outages: TimeSpan[], blocks: TrendBlock[], fromMs: number, toMs: number, chosen: { fromMs: number, toMs: number }[] | null }

/** Models of one loop from its data. */
export default function fitModel({ setup, outages, blocks, fromMs, toMs, chosen }: FitTask): ModelAnswer {
  return fitLoop(loopRecord(blocks, fromMs, toMs, setup.normalModes), setup, outages, fromMs, toMs, chosen)
}
