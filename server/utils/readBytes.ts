import type { H3Event } from 'h3'
import { refusal } from './refusal'

/** A body as bytes, with a hard cap. */
export async function readBytes(event: H3Event, limit: number): Promise<Buffer> {
  const chunks: Buffer[] = []
  let length = 0
  for await (const chunk of event.node.req) {
    length += (chunk as Buffer).length
    if (length > limit) throw refusal(413, 'too_large', `The request is larger than ${Math.round(limit / 1024)} KiB.`)
    chunks.push(chunk as Buffer)
  }
  return Buffer.concat(chunks)
}
