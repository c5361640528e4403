import { open, type FileHandle } from 'node:fs/promises'
import { createReadStream } from 'node:fs'
import { createGunzip, createInflateRaw } from 'node:zlib'
import type { Readable } from 'node:stream'
import { pooledBytes } from '../../../../db/blocks/pool'
import { UnreadableFile } from './unreadableFile'

export type Compression = 'none' | 'gzip' | 'zip' | 'parquet'
export type Encoding = 'utf-8' | 'windows-1252' | 'utf-16le' | 'utf-16be'

export interface TextFile {
  path: string
  bytes: number
  compression: Compression
  /** where the packed data begin, for zip */
  dataOffset: number
  encoding: Encoding
  /** bytes of the byte order mark */
  bom: number
}

const REGION = 1 << 20
const LONGEST_LINE = 1 << 24

/** Opens a file far enough to know how it is packed and written. Throws UnreadableFile when it is no text. */
export async function openTextFile(path: string): Promise<TextFile> {
  const handle = await open(path)
  try {
    const { size } = await handle.stat()
    if (size === 0) throw new UnreadableFile('The file is empty.')
    const head = await readAt(handle, 0, 8)
    const file: TextFile = { path, bytes: size, compression: 'none', dataOffset: 0, encoding: 'utf-8', bom: 0 }
    if (head.length >= 8 && head.toString('latin1', 0, 4) === 'PAR1') return { ...file, compression: 'parquet' }
    if (head[0] === 0x1F && head[1] === 0x8B) file.compression = 'gzip'
    else if (head.toString('latin1', 0, 4) === 'PK\x03\x04') Object.assign(file, { compression: 'zip', dataOffset: await zipMember(handle, size) })
    const sample = await firstBytes(file, 65_536)
    if (sample.length === 0) throw new UnreadableFile('The file is empty.')
    return { ...file, ...encodingOf(sample) }
  }
  finally { await handle.close() }
}

async function readAt(handle: FileHandle, position: number, length: number): Promise<Buffer> {
  const { buffer, bytesRead } = await handle.read(Buffer.alloc(length), 0, length, position)
  return buffer.subarray(0, bytesRead)
}

/** Offset of the packed data of the only member of a zip file (APPNOTE 6.3.10, 4.3). */
async function zipMember(handle: FileHandle, size: number): Promise<number> {
  const tailLength = Math.min(size, 65_557)
  const tail = await readAt(handle, size - tailLength, tailLength)
  const end = tail.lastIndexOf(Buffer.from('PK\x05\x06', 'latin1'))
  if (end < 0) throw new UnreadableFile('The zip file is damaged: its directory is missing.')
  let entries = tail.readUInt16LE(end + 10)
  let directorySize = tail.readUInt32LE(end + 12)
  let directoryAt = tail.readUInt32LE(end + 16)
  const locator = end - 20
  if (locator >= 0 && tail.toString('latin1', locator, locator + 4) === 'PK\x06\x07') {
    const record = await readAt(handle, Number(tail.readBigUInt64LE(locator + 8)), 56)
    entries = Number(record.readBigUInt64LE(32))
    directorySize = Number(record.readBigUInt64LE(40))
    directoryAt = Number(record.readBigUInt64LE(48))
  }
  if (directorySize > 1 << 22 || entries > 10_000) throw new UnreadableFile('The zip file holds more than one file; pack one export a file.')
  const directory = await readAt(handle, directoryAt, directorySize)
  let member = -1
  let at = 0
  for (let k = 0; k < entries && at + 46 <= directory.length; k++) {
    const nameLength = directory.readUInt16LE(at + 28)
    const extraLength = directory.readUInt16LE(at + 30)
    const name = directory.toString('utf8', at + 46, at + 46 + nameLength)
    if (!name.endsWith('/') && !/(^|\/)(__MACOSX\/|\.)/.test(name)) {
      if (member >= 0) throw new UnreadableFile('The zip file holds more than one file; pack one export a file.')
      if (directory.readUInt16LE(at + 8) & 1) throw new UnreadableFile('The zip file is encrypted.')
      if (directory.readUInt16LE(at + 10) !== 8) throw new UnreadableFile('The zip file is not packed by the usual method (deflate).')
      let offset = directory.readUInt32LE(at + 42)
      const extra = directory.subarray(at + 46 + nameLength, at + 46 + nameLength + extraLength)
      for (let e = 0; offset === 0xFFFFFFFF && e + 4 <= extra.length; e += 4 + extra.readUInt16LE(e + 2)) {
        // zip64: the fields that overflowed stand here in order: size, packed size, offset
        if (extra.readUInt16LE(e) === 1) offset = Number(extra.readBigUInt64LE(e + 4 + (directory.readUInt32LE(at + 24) === 0xFFFFFFFF ? 8 : 0) + (directory.readUInt32LE(at + 20) === 0xFFFFFFFF ? 8 : 0)))
      }
      const local = await readAt(handle, offset, 30)
      member = offset + 30 + local.readUInt16LE(26) + local.readUInt16LE(28)
    }
    at += 46 + nameLength + extraLength + directory.readUInt16LE(at + 32)
  }
  if (member < 0) throw new UnreadableFile('The zip file holds no file.')
  return member
}

function encodingOf(sample: Buffer): { encoding: Encoding, bom: number } {
  if (sample[0] === 0xEF && sample[1] === 0xBB && sample[2] === 0xBF) return { encoding: 'utf-8', bom: 3 }
  if (sample[0] === 0xFF && sample[1] === 0xFE) return { encoding: 'utf-16le', bom: 2 }
  if (sample[0] === 0xFE && sample[1] === 0xFF) return { encoding: 'utf-16be', bom: 2 }
  let even = 0
  let odd = 0
  for (let i = 0; i < sample.length; i++) {
    if (sample[i] !== 0) continue
    if (i % 2) odd++
    else even++
  }
  if (odd + even > 0) {
    const half = sample.length / 2
    if (odd > half * 0.4 && even < half * 0.05) return { encoding: 'utf-16le', bom: 0 }
    if (even > half * 0.4 && odd < half * 0.05) return { encoding: 'utf-16be', bom: 0 }
    throw new UnreadableFile('The file is not text: it holds binary data.')
  }
  try {
    new TextDecoder('utf-8', { fatal: true }).decode(sample, { stream: true })
    return { encoding: 'utf-8', bom: 0 }
  }
  catch { return { encoding: 'windows-1252', bom: 0 } }
}

/** Decodes bytes of a region for a person or a library; UTF-16 is UTF-8 by then. */
export const decoderOf = (encoding: Encoding): (bytes: Uint8Array) => string => encoding === 'windows-1252'
  ? (decoder => bytes => decoder.decode(bytes))(new TextDecoder('windows-1252'))
  : bytes => Buffer.from(bytes.buffer, bytes.byteOffset, bytes.length).toString('utf8')

function openStream(file: TextFile, onRead: (bytes: number) => void): Readable {
  const source = createReadStream(file.path, { start: file.dataOffset, highWaterMark: 1 << 18 })
  source.on('data', chunk => onRead(chunk.length))
  const unpack = file.compression === 'gzip' ? createGunzip({ chunkSize: 1 << 18 }) : createInflateRaw({ chunkSize: 1 << 18 })
  source.on('error', error => unpack.destroy(error))
  unpack.on('close', () => source.destroy())
  return source.pipe(unpack)
}

async function firstBytes(file: TextFile, length: number): Promise<Buffer> {
  const parts: Buffer[] = []
  let have = 0
  for await (const chunk of rawChunks(file, () => {})) {
    parts.push(Buffer.from(chunk))
    have += chunk.length
    if (have >= length) break
  }
  return Buffer.concat(parts).subarray(0, length)
}

async function* rawChunks(file: TextFile, onRead: (bytes: number) => void): AsyncGenerator<Uint8Array> {
  if (file.compression === 'none') {
    const buffer = pooledBytes('text.chunk', 1 << 18)
    const handle = await open(file.path)
    try {
      for (;;) {
        const { bytesRead } = await handle.read(buffer, 0, 1 << 18, null)
        if (bytesRead === 0) return
        onRead(bytesRead)
        yield buffer.subarray(0, bytesRead)
      }
    }
    finally { await handle.close() }
  }
  const stream = openStream(file, onRead)
  try {
    for await (const chunk of stream) yield chunk as Buffer
  }
  catch (error) {
    const code = (error as NodeJS.ErrnoException).code ?? ''
    if (code.startsWith('Z_')) throw new UnreadableFile('The packed file is damaged or cut short.')
    throw error
  }
  finally { stream.destroy() }
}

/** First text of the file, up to `length` characters, without the byte order mark. */
export async function firstText(file: TextFile, length: number): Promise<string> {
  const bytes = await firstBytes(file, file.encoding.startsWith('utf-16') ? length * 2 : length)
  return new TextDecoder(file.encoding).decode(bytes, { stream: true })
}

/**
 * Hands the file over as regions that end with a newline, UTF-16 turned into UTF-8, with flat memory.
 * @param take gets bytes[from..to) and answers how far it came: what is left comes again with more behind it
 * @param onRead file bytes read so far in this call, for the progress
 */
export async function readRegions(file: TextFile, take: (bytes: Uint8Array, from: number, to: number, last: boolean) => number | Promise<number>, onRead: (bytes: number) => void = () => {}): Promise<void> {
  let buffer = pooledBytes('text.region', REGION + 1)
  let filled = 0
  let read = 0
  let bom = file.encoding === 'utf-8' ? file.bom : 0
  const count = (n: number) => onRead(read += n)
  const feed = async (last: boolean) => {
    if (filled === 0) return
    if (last && buffer[filled - 1] !== 10) buffer[filled++] = 10
    let newline = filled - 1
    while (newline >= 0 && buffer[newline] !== 10) newline--
    if (newline < 0) return
    const done = await take(buffer, 0, newline + 1, last)
    buffer.copyWithin(0, done, filled)
    filled -= done
  }
  const push = async (chunk: Uint8Array) => {
    let at = 0
    if (bom > 0) {
      at = Math.min(bom, chunk.length)
      bom -= at
    }
    while (at < chunk.length) {
      const n = Math.min(chunk.length - at, buffer.length - 1 - filled)
      buffer.set(chunk.subarray(at, at + n), filled)
      filled += n
      at += n
      if (filled < buffer.length - 1) continue
      const before = filled
      await feed(false)
      if (filled === before) {
        if (buffer.length > LONGEST_LINE) throw new UnreadableFile('A line is longer than 16 MiB; this is no export of a historian.')
        const larger = new Uint8Array(buffer.length * 2)
        larger.set(buffer)
        buffer = larger
      }
    }
  }
  if (file.encoding.startsWith('utf-16')) {
    const decoder = new TextDecoder(file.encoding)
    for await (const chunk of rawChunks(file, count)) await push(Buffer.from(decoder.decode(chunk, { stream: true })))
    await push(Buffer.from(decoder.decode()))
  }
  else { for await (const chunk of rawChunks(file, count)) await push(chunk) }
  await feed(true)
}
