import type { H3Event } from 'h3'
import { z } from 'zod'
import { findImport, type ImportRow } from '../../db/repositories/imports'
import { database } from './database'
import { notFound } from './refusal'

const paramsSchema = z.object({ id: z.coerce.number().int().positive().max(Number.MAX_SAFE_INTEGER) })

/** The import that the path names, or 404. */
export async function readImportId(event: H3Event): Promise<ImportRow> {
  const params = paramsSchema.safeParse(event.context.params)
  const found = params.success ? await findImport(database(), params.data.id) : null
  if (!found) throw notFound('This import')
  return found
}
