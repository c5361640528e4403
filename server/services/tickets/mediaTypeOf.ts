const starts = (bytes: Uint8Array, magic: number[], at = 0) => magic.every((b, i) => bytes[at + i] === b)
const ascii = (bytes: Uint8Array, from: number, to: number) => String.fromCharCode(...bytes.subarray(from, to))
const HEIC = ['heic', 'heix', 'hevc', 'heim', 'heis', 'mif1', 'msf1']

/**
 * Media type by the first bytes, whatever name or header came along; null for what a ticket does not take.
 * Text is what reads as UTF-8 without control characters, and stays text whatever it says: it is never served as HTML.
 * Sources: JPEG ISO/IEC 10918-1 B.1.1.3; PNG ISO/IEC 15948 5.2; WebP RFC 9649; HEIF ISO/IEC 23008-12; PDF ISO 32000-1 7.5.2.
 */
export function mediaTypeOf(bytes: Uint8Array, name: string): string | null {
  if (starts(bytes, [0xFF, 0xD8, 0xFF])) return 'image/jpeg'
  if (starts(bytes, [0x89, 0x50, 0x4E, 0x47, 0x0D, 0x0A, 0x1A, 0x0A])) return 'image/png'
  if (ascii(bytes, 0, 4) === 'RIFF' && ascii(bytes, 8, 12) === 'WEBP') return 'image/webp'
  if (ascii(bytes, 4, 8) === 'ftyp' && HEIC.includes(ascii(bytes, 8, 12))) return 'image/heic'
  if (ascii(bytes, 0, 5) === '%PDF-') return 'application/pdf'
  return isText(bytes) ? (/\.csv$/i.test(name) ? 'text/csv' : 'text/plain') : null
}

function isText(bytes: Uint8Array): boolean {
  try {
    // eslint-disable-next-line no-control-regex -- that is what is looked for
    return !/[\u0000-\u0008\u000E-\u001F\u007F]/.test(new TextDecoder('utf-8', { fatal: true }).decode(bytes))
  }
  catch { return false }
}
