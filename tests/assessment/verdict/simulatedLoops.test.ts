import { describe, expect, it } from 'vitest'
import { runCase, type CaseResult } from '../../../scripts/simulatedCases'
import type { Cause } from '../../../shared/assessment/simulation/scenario'

// A small look at what `npm run accuracy` measures on a thousand loops. The truth is what the simulator built in, the seeds are neither
// those of the calibration nor those of the accuracy; seeds of the form 4k + 1 give short records.
const CAUSES: Cause[] = ['healthy', 'tightTuning', 'stickingValve', 'carriedIn', 'saturated', 'leftInManual', 'sensorOutOfRange', 'noiseDominated', 'tooSlow', 'compressed']
const results: CaseResult[] = CAUSES.flatMap(cause => (['flow', 'pressure', 'temperature'] as const).flatMap(type => runCase({ cause, type, seed: 3_000_001 }) ?? []))

describe('verdicts on simulated loops', () => {
  it('are right on at least 85 % of the loops', () => {
    const wrong = results.filter(r => r.verdict !== r.truth)
    expect(wrong.length / results.length, wrong.map(r => `${r.cause} on ${r.type}: ${r.verdict}`).join('; ')).toBeLessThanOrEqual(0.15)
  })
  it('accuse no sound valve', () => {
    expect(results.filter(r => r.verdict === 'huntingValve' && r.cause !== 'stickingValve' && r.hidden !== 'stickingValve')).toEqual([])
  })
  it('call no healthy loop unhealthy', () => {
    expect(results.filter(r => r.cause === 'healthy').every(r => r.verdict === 'steady' || r.verdict === 'cannotTell')).toBe(true)
  })
})
