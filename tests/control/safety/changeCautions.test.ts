import { describe, expect, it } from 'vitest'
import { changeCautions } from '../../../shared/control/safety/changeCautions'
import { margins } from '../../../shared/control/margins/margins'
import type { ProcessModel } from '../../../shared/control/types'

const present = { controllerGain: 1, integralTime: 60, derivativeTime: 0 }
const model: ProcessModel = { kind: 'fopdt', processGain: 1, timeConstant: 30, deadTime: 10 }
const codes = (change: Parameters<typeof changeCautions>[0]) => changeCautions(change).filter(c => c.level !== 'note').map(c => c.code)

describe('changeCautions', () => {
  it('has nothing to add to a moderate change but the standing cautions', () => {
    const cautions = changeCautions({ present, proposed: { ...present, controllerGain: 1.9, integralTime: 31 }, model })
    expect(cautions.every(c => c.level === 'note')).toBe(true)
    const text = cautions.map(c => c.sentence).join(' ')
    for (const word of ['management of change', 'permit to work', 'operator', 'interlocks', 'local codes', 'qualified persons', 'go back']) expect(text).toContain(word)
  })
  it.each([
    [{ controllerGain: 2.1 }, 'largeChange'], [{ controllerGain: 0.45 }, 'largeChange'], [{ integralTime: 121 }, 'largeChange'], [{ integralTime: 29 }, 'largeChange'],
    [{ integralTime: Infinity }, 'noIntegral'], [{ controllerGain: -1 }, 'wrongAction'], [{ derivativeTime: 5 }, 'derivativeOnNoise'],
  ])('%o: %s', (change, code) => {
    expect(codes({ present, proposed: { ...present, ...change }, model })).toContain(code)
  })
  it('stops where retuning is the wrong work or the loop would not be stable', () => {
    const proposed = { ...present, controllerGain: 20 }
    expect(changeCautions({ present, proposed: present, verdict: 'huntingValve' })[0]).toMatchObject({ code: 'repairFirst', level: 'stop', sentence: expect.stringContaining('Retuning will not cure this: repair first') })
    expect(codes({ present, proposed, model, margins: margins(model, proposed) })).toContain('unstable')
    expect(codes({ present, proposed: present, modelStatus: 'insufficient' })).toContain('modelUncertain')
  })
  it('warns of little robustness above Ms 2 (usual range 1.4 to 2: Åström, Hägglund 2006)', () => {
    const tight = { controllerGain: 3, integralTime: 30, derivativeTime: 0 }
    const m = margins(model, tight)
    expect(m.maximumSensitivity).toBeGreaterThan(2)
    expect(codes({ present: null, proposed: tight, model, margins: m })).toContain('littleRobustness')
  })
  it('puts the gravest first', () => {
    const levels = changeCautions({ present, proposed: { controllerGain: -3, integralTime: 10, derivativeTime: 0 }, model }).map(c => c.level)
    expect(levels).toEqual([...levels].sort((a, b) => ['stop', 'warn', 'note'].indexOf(a) - ['stop', 'warn', 'note'].indexOf(b)))
  })
})
