import { ref } from 'vue'

const PART_BYTES = 8 * 1024 * 1024
const TUS = { 'Tus-Resumable': '1.0.0' }
const RETRIES = 8

export interface UploadState { name: string, bytes: number, sent: number, state: 'sending' | 'waiting' | 'done' | 'failed', message: string, importId: number | null, secondsLeft: number | null }

const base64 = (text: string) => btoa(String.fromCharCode(...new TextEncoder().encode(text)))
const keyOf = (file: File) => `fettle.upload.${file.name}.${file.size}.${file.lastModified}`

/**
 * Sends files to the resumable upload (tus 1.0), part by part. A broken connection is waited for; after a reload the
 * same file, chosen again, goes on where it stopped.
 */
export function useUpload() {
  const uploads = ref<UploadState[]>([])

  async function begin(file: File, options: Record<string, string>): Promise<string> {
    const metadata = Object.entries({ filename: file.name, name: file.name, ...options }).map(([k, v]) => `${k} ${base64(v)}`).join(',')
    const answer = await $fetch.raw('/api/uploads', { method: 'POST', headers: { ...TUS, 'Upload-Length': String(file.size), 'Upload-Metadata': metadata } })
    const url = answer.headers.get('location')!
    localStorage.setItem(keyOf(file), url)
    return url
  }

  async function offsetOf(url: string): Promise<{ offset: number, importId: number | null } | null> {
    try {
      const answer = await $fetch.raw(url, { method: 'HEAD', headers: TUS })
      return { offset: Number(answer.headers.get('upload-offset')), importId: Number(answer.headers.get('import-id')) || null }
    }
    catch (error) {
      if (toFailure(error).status === 404) return null
      throw error
    }
  }

  async function send(file: File, options: Record<string, string> = {}): Promise<number | null> {
    uploads.value = [...uploads.value, { name: file.name, bytes: file.size, sent: 0, state: 'sending', message: '', importId: null, secondsLeft: null }]
    const mine = uploads.value[uploads.value.length - 1]!
    let failures = 0
    let url = localStorage.getItem(keyOf(file))
    const started = Date.now()
    let first = -1
    for (;;) {
      try {
        const known = url ? await offsetOf(url) : null
        if (!known || !url) url = await begin(file, options)
        let offset = known?.offset ?? 0
        if (first < 0) first = offset
        mine.importId = known?.importId ?? null
        while (mine.importId === null) {
          mine.sent = offset
          mine.state = 'sending'
          const answer = await $fetch.raw(url, { method: 'PATCH', headers: { ...TUS, 'Upload-Offset': String(offset), 'Content-Type': 'application/offset+octet-stream' }, body: file.slice(offset, offset + PART_BYTES), retry: 0 })
          offset = Number(answer.headers.get('upload-offset'))
          mine.importId = Number(answer.headers.get('import-id')) || null
          mine.secondsLeft = offset > first ? (Date.now() - started) / 1000 * (file.size - offset) / (offset - first) : null
          failures = 0
        }
        mine.sent = file.size
        mine.state = 'done'
        localStorage.removeItem(keyOf(file))
        return mine.importId
      }
      catch (error) {
        const failure = toFailure(error)
        if ((failure.status >= 400 && failure.status < 500 && ![409, 423].includes(failure.status)) || ++failures > RETRIES) {
          mine.state = 'failed'
          mine.message = failure.message
          return null
        }
        mine.state = 'waiting'
        mine.message = 'The connection broke; trying again.'
        await new Promise(resolve => setTimeout(resolve, Math.min(15_000, 500 * 2 ** failures)))
      }
    }
  }
  return { uploads, send, drop: (u: UploadState) => { uploads.value = uploads.value.filter(x => x !== u) } }
}
