import { randomBytes, scrypt, timingSafeEqual } from 'node:crypto'
import { Refusal } from '../refusal'

/** OWASP Application Security Verification Standard 5.0, appendix on password storage: scrypt with N 2^15, r 8, p 3 at least. */
const COST = { N: 2 ** 15, r: 8, p: 3 }
const KEY_BYTES = 32
/** Each hash takes 32 MiB and a third of a second of a core: more than two at once would starve everything else. */
const AT_ONCE = 2
/** Beyond this many waiting, an answer would come too late to be of use. */
const QUEUE_LIMIT = 50

let working = 0
const waiting: (() => void)[] = []

async function derive(password: string, salt: Buffer, cost: { N: number, r: number, p: number }, bytes: number): Promise<Buffer> {
  if (working >= AT_ONCE) {
    if (waiting.length >= QUEUE_LIMIT) throw new Refusal(503, 'busy', 'Too many passwords are being checked at once. Please try again in a moment.', { retryAfter: 5 })
    await new Promise<void>(resolve => waiting.push(resolve))
  }
  else working++
  try {
    return await new Promise((resolve, reject) => scrypt(password.normalize('NFKC'), salt, bytes, { ...cost, maxmem: 256 * cost.N * cost.r }, (error, key) => error ? reject(error) : resolve(key)))
  }
  finally {
    // the place goes straight to the next in line
    const next = waiting.shift()
    if (next) next()
    else working--
  }
}

/** A password's hash with its salt and cost, so that the cost can be raised later: `scrypt$N$r$p$salt$key`. */
export async function hashPassword(password: string): Promise<string> {
  const salt = randomBytes(16)
  const key = await derive(password, salt, COST, KEY_BYTES)
  return ['scrypt', COST.N, COST.r, COST.p, salt.toString('base64url'), key.toString('base64url')].join('$')
}

/**
 * Whether a password belongs to a hash. `null` (no such account, or no password yet) takes as long as a wrong password,
 * so that the time of the answer does not tell which addresses have accounts.
 */
export async function verifyPassword(password: string, stored: string | null): Promise<boolean> {
  const [scheme, N, r, p, salt, key] = stored?.split('$') ?? []
  if (scheme !== 'scrypt' || !key) {
    await derive(password, Buffer.alloc(16), COST, KEY_BYTES)
    return false
  }
  const wanted = Buffer.from(key, 'base64url')
  const found = await derive(password, Buffer.from(salt!, 'base64url'), { N: Number(N), r: Number(r), p: Number(p) }, wanted.length)
  return timingSafeEqual(found, wanted)
}
