import type { Database } from '../../../db/knex'
import { listBenefit, type BenefitRow } from '../../../db/repositories/tickets'
import { getSettings } from '../settings'

/** Hours a week won back, by area and month of closing, from proven tickets only. */
export async function readBenefit(db: Database): Promise<{ rows: BenefitRow[] }> {
  const { zone } = await getSettings(db)
  return { rows: await listBenefit(db, zone) }
}
