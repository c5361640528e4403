import { mkdirSync } from 'node:fs'
import { resolve } from 'node:path'
import fsDriver from 'unstorage/drivers/fs-lite'
import s3Driver from 'unstorage/drivers/s3'
import type { FileStorage } from '../services/tickets/files'
import { environment } from './environment'

let mounted = false

/**
 * Nitro's storage `files`: the folder `attachments` in DATA_DIR, which a backup holds too, or the bucket that FILES_S3_* name (any S3-compatible
 * service). Mounted on first use, because the folder is known only when the server runs.
 */
export function fileStorage(): FileStorage {
  if (!mounted) {
    const e = environment()
    const folder = resolve(e.DATA_DIR, 'attachments')
    // the driver would make it readable for everybody on this machine
    if (!e.FILES_S3_BUCKET) mkdirSync(folder, { recursive: true, mode: 0o700 })
    useStorage().mount('files', e.FILES_S3_BUCKET
      ? s3Driver({ bucket: e.FILES_S3_BUCKET, endpoint: e.FILES_S3_ENDPOINT!, region: e.FILES_S3_REGION, accessKeyId: e.FILES_S3_KEY!, secretAccessKey: e.FILES_S3_SECRET! })
      : fsDriver({ base: folder }))
    mounted = true
  }
  return useStorage('files') as unknown as FileStorage
}
