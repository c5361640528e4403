import { describe, expect, it } from 'vitest'
import type { Measures } from '../../shared/assessment/types'
import { loopSentence } from '../../shared/format/loopSentence'
import { noHours } from '../../shared/ribbon/states'

const read = (pieces: { text: string }[]) => pieces.map(p => p.text).join('')
const base = { confidence: 0.862, verdictReason: 'It was sampled too slowly.', lostHours: 63, hours: { ...noHours(), manual: 38 }, measures: { oscillationPeriod: 2280, reversalsPerDay: 700 } as Measures }

describe('loopSentence', () => {
  it('says what is wrong and how sure that is', () => {
    expect(read(loopSentence('FIC-2107', { ...base, verdict: 'huntingValve' }))).toBe('FIC-2107 hunts with a period of 38 min, most likely because its valve sticks. We are 86 % sure.')
    expect(read(loopSentence('TIC-3110', { ...base, verdict: 'manual' }))).toBe('TIC-3110 was left in manual for 38 hours. We are 86 % sure.')
  })
  it('never claims to be sure when it cannot tell, and gives the reason', () => {
    expect(read(loopSentence('AIC-1220', { ...base, verdict: 'cannotTell' }))).toBe('AIC-1220: the data cannot tell what is wrong. It was sampled too slowly.')
  })
  it('calls no on-off loop tuned too tight', () => {
    expect(read(loopSentence('TIC-263', { ...base, verdict: 'huntingTuning' }, 'onOff'))).toContain('swings beyond its tolerance')
  })
  it('is calm about a steady week', () => {
    expect(read(loopSentence('LIC-1', { ...base, verdict: 'steady', lostHours: 0 }))).toBe('LIC-1 was steady all week.')
  })
})
