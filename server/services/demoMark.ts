import type { Database } from '../../db/knex'
import { hasLoops } from '../../db/repositories/site'
import { readSetting, writeSetting } from '../../db/repositories/settings'

const KEY = 'demoPlant'

/**
 * Whether the demo plant is still to be made: on a first start (no loops), or when an earlier start was cut short while
 * making it. The mark is set before, so that a half-made plant is noticed; the seed must bear being run again.
 */
export async function demoToSeed(db: Database): Promise<boolean> {
  const mark = await readSetting(db, KEY)
  if (mark === 'made') return false
  if (mark === undefined && await hasLoops(db)) return false
  await writeSetting(db, KEY, 'begun')
  return true
}

export async function markDemoSeeded(db: Database): Promise<void> {
  await writeSetting(db, KEY, 'made')
}
