import { describe, expect, it } from 'vitest'
import { hashPassword, verifyPassword } from '../../server/services/people/passwordHash'

/** Stored form of a hash given as hex. */
const stored = (N: number, r: number, p: number, salt: string, hex: string) => ['scrypt', N, r, p, Buffer.from(salt).toString('base64url'), Buffer.from(hex.replace(/\s/g, ''), 'hex').toString('base64url')].join('$')

describe('password hashes', () => {
  it('agree with the test vectors of RFC 7914 (Percival, Josefsson 2016), section 12', async () => {
    const vector = stored(1024, 8, 16, 'NaCl', `fd ba be 1c 9d 34 72 00 78 56 e7 19 0d 01 e9 fe 7c 6a d7 cb c8 23 78 30 e7 73 76 63 4b 37 31 62
      2e af 30 d9 2e 22 a3 88 6f f1 09 27 9d 98 30 da c7 27 af b9 4a 83 ee 6d 83 60 cb df a2 cc 06 40`)
    expect(await verifyPassword('password', vector)).toBe(true)
    expect(await verifyPassword('Password', vector)).toBe(false)
    const second = stored(16384, 8, 1, 'SodiumChloride', `70 23 bd cb 3a fd 73 48 46 1c 06 cd 81 fd 38 eb fd a8 fb ba 90 4f 8e 3e a9 b5 43 f6 54 5d a1 f2
      d5 43 29 55 61 3f 0f cf 62 d4 97 05 24 2a 9a f9 e6 1e 85 dc 0d 65 1e 40 df cf 01 7b 45 57 58 87`)
    expect(await verifyPassword('pleaseletmein', second)).toBe(true)
  })
  it('are made with at least the cost that OWASP ASVS 5.0 asks of scrypt, and a salt of their own', async () => {
    const [a, b] = await Promise.all([hashPassword('the same words'), hashPassword('the same words')])
    expect(a).not.toBe(b)
    const [scheme, N, r, p] = a.split('$')
    expect([scheme, Number(N) >= 2 ** 15, Number(r), Number(p)]).toEqual(['scrypt', true, 8, 3])
    expect(await verifyPassword('the same words', a)).toBe(true)
  })
  it('take a password in any Unicode form, because keyboards differ', async () => {
    expect(await verifyPassword('Pru\u0308fung 12345', await hashPassword('Pr\u00FCfung 12345'))).toBe(true)
  })
  it('no hash, or one that is not ours, fits nothing', async () => {
    expect(await verifyPassword('', null)).toBe(false)
    expect(await verifyPassword('x', 'md5$abc')).toBe(false)
  })
  it('many at once all get their answer', async () => {
    const cheap = stored(16, 1, 1, '', '77 d6 57 62 38 65 7b 20 3b 19 ca 42 c1 8a 04 97 f1 6b 48 44 e3 07 4a e8 df df fa 3f ed e2 14 42 fc d0 06 9d ed 09 48 f8 32 6a 75 3a 0f c8 1f 17 e8 d3 e0 fb 2e 0d 36 28 cf 35 e2 0c 38 d1 89 06')
    expect(await Promise.all(Array.from({ length: 40 }, (_, i) => verifyPassword(i % 2 ? 'wrong' : '', cheap)))).toEqual(Array.from({ length: 40 }, (_, i) => i % 2 === 0))
  })
})
