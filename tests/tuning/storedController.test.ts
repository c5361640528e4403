import { describe, expect, it } from 'vitest'
import { idealTuning } from '../../shared/assessment/simulation/idealTuning'
import { idealOf, storedController, type StoredTuning } from '../../shared/tuning/storedController'

const stored: StoredTuning = { form: 'parallel', action: 'reverse', gain: 2, gainUnit: 'gain', integralTime: 50, derivativeTime: 4, timeUnit: 's', filterTimeS: null, setpointWeight: null }

describe('a stored parallel controller', () => {
  // Kp = Kc, Ki = Kc / Ti, Kd = Kc Td (textbook identity): Ki = 1/50 per s, so Ti = 2 * 50 = 100 s, Td = 4 / 2 = 2 s
  it('means the same on the desk as in the simulator', () => {
    const shown = storedController(stored)!
    expect(shown.integral).toBeCloseTo(0.02, 12)
    expect(idealOf(shown)).toMatchObject({ status: 'ok', value: { controllerGain: 2, integralTime: 100, derivativeTime: 2 } })
    expect(idealTuning('parallel', 2, 50, 4)).toMatchObject({ controllerGain: 2, integralTime: 100, derivativeTime: 2 })
  })
  it('in minutes and in repeats per minute', () => {
    expect(storedController({ ...stored, integralTime: 0.5, timeUnit: 'min' })!.integral).toBeCloseTo(2, 12)
    expect(storedController({ ...stored, integralTime: 2, timeUnit: 'repeatsPerMin' })!.integral).toBeCloseTo(2, 12)
  })
  it('has no integral action where none is set', () => {
    expect(storedController({ ...stored, integralTime: null })!.integral).toBeNull()
  })
})
