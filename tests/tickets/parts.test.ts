import { describe, expect, it } from 'vitest'
import { mediaTypeOf } from '../../server/services/tickets/mediaTypeOf'
import { writtenAt } from '../../server/services/tickets/writtenAt'
import { joinProofs } from '../../shared/tickets/joinProofs'
import { nextStep } from '../../shared/tickets/moveWords'
import { PROOF_VERDICTS, TICKET_STATES, type LoopProof, type ProofVerdict } from '../../shared/types/tickets'

const loop = (tag: string, verdict: ProofVerdict, provisional = false) => ({ tag, verdict, provisional, reason: `${tag} says so.` }) as LoopProof

describe('joinProofs', () => {
  it('is worse as soon as one is, else better as soon as one is, else no change, else it cannot tell', () => {
    const rank = ['worse', 'better', 'noChange', 'cannotTell'] as const
    for (const a of PROOF_VERDICTS) for (const b of PROOF_VERDICTS) {
      const expected = rank.find(v => v === a || v === b)
      expect(joinProofs([loop('A', a), loop('B', b)]).verdict).toBe(expected)
      expect(joinProofs([loop('B', b), loop('A', a)]).verdict).toBe(expected)
    }
  })
  it('is provisional while a loop that says something is', () => {
    expect(joinProofs([loop('A', 'better'), loop('B', 'better', true)]).provisional).toBe(true)
    expect(joinProofs([loop('A', 'better'), loop('B', 'cannotTell', true)]).provisional).toBe(false)
    expect(joinProofs([loop('A', 'cannotTell')]).provisional).toBe(true)
  })
  it('says what each loop says, and the loop’s own words where there is one', () => {
    expect(joinProofs([loop('A', 'better')]).reason).toBe('A says so.')
    expect(joinProofs([loop('A', 'better'), loop('B', 'worse'), loop('C', 'better')]).reason).toBe('Worse: B; better: A, C.')
    expect(joinProofs([]).verdict).toBe('cannotTell')
  })
})

describe('mediaTypeOf', () => {
  const hex = (text: string) => new Uint8Array(Buffer.from(text, 'hex'))
  // first bytes by ISO/IEC 10918-1, ISO/IEC 15948, RFC 9649, ISO/IEC 23008-12, ISO 32000-1
  it.each([
    ['ffd8ffe000104a464946', 'image/jpeg'], ['89504e470d0a1a0a0000000d', 'image/png'], ['524946461a00000057454250565038', 'image/webp'],
    ['00000018667479706865696300000000', 'image/heic'], ['255044462d312e37', 'application/pdf'],
  ])('knows %s', (bytes, type) => expect(mediaTypeOf(hex(bytes), 'whatever.exe')).toBe(type))
  it('takes UTF-8 text as text only, and nothing else whatever its name', () => {
    expect(mediaTypeOf(Buffer.from('time,value\n1,2\n'), 'a.csv')).toBe('text/csv')
    expect(mediaTypeOf(Buffer.from('<svg onload="x()"/>'), 'a.svg')).toBe('text/plain')
    for (const bytes of ['4d5a9000', '504b0304', '7f454c46', '47494638396101000100800000', '524946460000000041564920', '000000186674797069736f6d', 'ff00fe']) expect(mediaTypeOf(hex(bytes), 'a.png')).toBeNull()
  })
})

describe('words and times', () => {
  it('has a next step for every state and person', () => {
    for (const state of TICKET_STATES) for (const mayWork of [true, false]) expect(nextStep({ state, assignee: null, mayWork }, 2)).toMatch(/\.$/)
    expect(nextStep({ state: 'inWork', assignee: 'T', mayWork: true }, 1)).toBe('One check is still to be answered before handing back.')
  })
  it('a device whose clock runs ahead puts nothing into the future', () => {
    const now = new Date('2026-11-30T10:00:00Z')
    expect(writtenAt(new Date('2026-11-30T11:00:00Z'), now)).toBe(now)
    expect(writtenAt(new Date('2026-11-30T09:00:00Z'), now).toISOString()).toBe('2026-11-30T09:00:00.000Z')
    expect(writtenAt(undefined, now)).toBe(now)
  })
})
