import { unlink } from 'node:fs/promises'
import { join } from 'node:path'
import type { Knex } from 'knex'
import { takeOldFiles } from '../../../db/repositories/imports'
import { deleteBlocksBefore } from '../../../db/repositories/trendBlocks'
import { takeStaleUploads } from '../../../db/repositories/uploads'
import { getSettings } from '../settings'

const DAY_MS = 86_400_000

/** Takes away files and samples that the site's retention lets go, and uploads that nobody went on with for two days. */
export async function tidyUploads(db: Knex, dataDir: string, now: Date): Promise<void> {
  const settings = await getSettings(db)
  const files = await takeOldFiles(db, new Date(now.getTime() - settings.uploadRetentionDays * DAY_MS))
  const stale = (await takeStaleUploads(db, new Date(now.getTime() - 2 * DAY_MS))).map(id => `${id}.part`)
  for (const file of [...files, ...stale]) await unlink(join(dataDir, 'uploads', file)).catch(() => {})
  if (settings.trendRetentionDays) await deleteBlocksBefore(db, new Date(now.getTime() - settings.trendRetentionDays * DAY_MS).toISOString().slice(0, 10))
}
