import type { Knex } from 'knex'
import type { Database } from '../../db/knex'
import { insertAudit } from '../../db/repositories/audit'
import { readSettings, writeSetting } from '../../db/repositories/settings'
import { settingsSchema, type SiteSettings } from '../../shared/schemas/settings'
import type { Caller } from '../../shared/types/people'

export type { SiteSettings } from '../../shared/schemas/settings'

/** The site's settings, defaults where nothing is stored. A stored value that no longer fits falls back to its default. */
export async function getSettings(db: Database): Promise<SiteSettings> {
  const stored = await readSettings(db)
  const values: Record<string, unknown> = {}
  for (const [key, schema] of Object.entries(settingsSchema.shape)) {
    const result = schema.safeParse(stored[key])
    values[key] = result.success ? result.data : schema.parse(undefined)
  }
  return values as SiteSettings
}

/** Stores what differs and writes one audit row with old and new values. */
export async function changeSettings(db: Knex, change: Partial<SiteSettings>, by: Pick<Caller, 'userId' | 'name'>): Promise<SiteSettings> {
  return await db.transaction(async (trx) => {
    const before = await getSettings(trx)
    const changed = (Object.entries(change) as [keyof SiteSettings, unknown][]).filter(([key, value]) => value !== undefined && JSON.stringify(value) !== JSON.stringify(before[key]))
    for (const [key, value] of changed) await writeSetting(trx, key, value)
    if (changed.length) await insertAudit(trx, { userId: by.userId, actor: by.name, action: 'settings.change', entity: 'settings', data: Object.fromEntries(changed.map(([key, value]) => [key, { from: before[key], to: value }])) })
    return await getSettings(trx)
  })
}
