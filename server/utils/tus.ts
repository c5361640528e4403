import { resolve } from 'node:path'
import type { H3Event } from 'h3'
import { getHeader, setHeader } from 'h3'
import type { UploadPlace } from '../services/imports/resumableUploads'
import { environment } from './environment'
import { refusal } from './refusal'
import type { Caller } from '../../shared/types/people'
import { requireRole } from './requireRole'

export const TUS_VERSION = '1.0.0'

/** Headers, version and caller of a resumable upload request. */
export async function tusRequest(event: H3Event): Promise<{ caller: Caller & { userId: number }, place: UploadPlace }> {
  setHeader(event, 'Tus-Resumable', TUS_VERSION)
  const caller = await requireRole(event, 'engineer')
  if (getHeader(event, 'tus-resumable') !== TUS_VERSION) {
    setHeader(event, 'Tus-Version', TUS_VERSION)
    throw refusal(412, 'wrong_version', `This server speaks tus ${TUS_VERSION}.`)
  }
  const { DATA_DIR, UPLOAD_LIMIT_BYTES } = environment()
  return { caller: caller as Caller & { userId: number }, place: { dataDir: resolve(DATA_DIR), limitBytes: UPLOAD_LIMIT_BYTES } }
}
