import type { Knex } from 'knex'
import { findDigest } from '../../../db/repositories/digests'
import { renderDigest, type RenderedDigest } from '../../../shared/digest/renderDigest'
import { buildDigest } from './buildDigest'
import { unsubscribeUrl } from './sendDigest'

/** The digest of a week as it would go out now. The stop link of a preview leads to nobody's subscription. */
export async function previewDigest(db: Knex, { week, areaIds, publicUrl, now }: { week: string, areaIds: number[], publicUrl: string, now: Date }): Promise<RenderedDigest & { week: string, loops: number, madeAt: Date | null, recipients: number }> {
  const [model, made] = await Promise.all([buildDigest(db, { week, areaIds, publicUrl, now }), findDigest(db, week)])
  return { ...renderDigest(model, unsubscribeUrl(publicUrl, 'preview')), week, loops: model.loops, madeAt: made?.madeAt ?? null, recipients: made?.recipients ?? 0 }
}
