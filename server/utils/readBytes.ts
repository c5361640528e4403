import type { H3Event } from 'h3'
import { getHeader } from 'h3'
import { refusal } from './refusal'

/** A large upload lifts the server's own limit on slow requests (see patientBody); what is small has to come soon all the same. */
const LONGEST_MS = 60_000

/** A body as bytes, with a hard cap. */
export async function readBytes(event: H3Event, limit: number): Promise<Buffer> {
  const tooLarge = () => refusal(413, 'too_large', `The request is larger than ${Math.round(limit / 1024)} KiB.`)
  if (Number(getHeader(event, 'content-length') ?? 0) > limit) throw tooLarge()
  const { req } = event.node
  const late = setTimeout(() => req.destroy(), LONGEST_MS)
  const chunks: Buffer[] = []
  let length = 0
  try {
    for await (const chunk of req) {
      length += (chunk as Buffer).length
      if (length > limit) throw tooLarge()
      chunks.push(chunk as Buffer)
    }
  }
  finally { clearTimeout(late) }
  return Buffer.concat(chunks)
}
