import { margins, type Margins } from '../margins/margins'
import { responseFigures, type ResponseFigures } from '../simulation/responseFigures'
import { simulateClosedLoop, type ClosedLoopCase, type ClosedLoopResponse } from '../simulation/simulateClosedLoop'
import type { ProcessModel } from '../types'

/** 95 % intervals of the model's parameters, as a fit gives them; times in s. */
export interface ModelIntervals {
  processGain?: { low: number, high: number }
  timeConstant?: { low: number, high: number }
  deadTime?: { low: number, high: number }
}

export interface DoubtCase {
  /** e.g. `dead time +30 %` */
  name: string
  model: ProcessModel
  margins: Margins
  figures: ResponseFigures
  response: ClosedLoopResponse
}

/**
 * Margins and responses where the model is wrong: dead time 30 % longer and shorter, gain 50 % higher and lower, both at
 * their worst, and the corners of the fitted intervals. The worst case is the first unstable one, else the one with the largest Ms.
 * @param loop as for the simulation; its model is the nominal one
 * @returns cases, the nominal one first, and the index of the worst
 * @throws RangeError as `margins` and `simulateClosedLoop`
 * Source: corners of a parameter box, e.g. Skogestad, Postlethwaite, Multivariable Feedback Control, ch. 7. For Ms of a
 *   loop with one uncertain parameter the worst value need not lie on a corner; the corners are a check, not a proof.
 */
export function robustnessToDoubt(loop: ClosedLoopCase, intervals: ModelIntervals = {}): { cases: DoubtCase[], worst: number } {
  const nominal = loop.model
  const variants: { name: string, model: ProcessModel }[] = [
    { name: 'as fitted', model: nominal },
    { name: 'dead time +30 %', model: { ...nominal, deadTime: 1.3 * nominal.deadTime } },
    { name: 'dead time -30 %', model: { ...nominal, deadTime: 0.7 * nominal.deadTime } },
    { name: 'gain +50 %', model: { ...nominal, processGain: 1.5 * nominal.processGain } },
    { name: 'gain -50 %', model: { ...nominal, processGain: 0.5 * nominal.processGain } },
    { name: 'gain +50 % and dead time +30 %', model: { ...nominal, processGain: 1.5 * nominal.processGain, deadTime: 1.3 * nominal.deadTime } },
  ]
  const ends = (interval: { low: number, high: number } | undefined) => interval ? [['low', interval.low], ['high', interval.high]] as const : [[null, null]] as const
  if (intervals.processGain || intervals.timeConstant || intervals.deadTime) {
    for (const [gainEnd, processGain] of ends(intervals.processGain)) {
      for (const [lagEnd, timeConstant] of ends(nominal.kind === 'integrating' ? undefined : intervals.timeConstant)) {
        for (const [delayEnd, deadTime] of ends(intervals.deadTime)) {
          const parts = [gainEnd && `gain ${gainEnd}`, lagEnd && `lag ${lagEnd}`, delayEnd && `dead time ${delayEnd}`].filter(Boolean)
          const model = { ...nominal, ...(processGain !== null && { processGain }), ...(timeConstant !== null && { timeConstant }), ...(deadTime !== null && { deadTime: Math.max(0, deadTime) }) } as ProcessModel
          // An interval of the gain that holds 0 says nothing about the loop; such a model is refused before.
          if (model.processGain * nominal.processGain > 0) variants.push({ name: `interval: ${parts.join(', ')}`, model })
        }
      }
    }
  }
  const cases = variants.map(({ name, model }) => {
    const response = simulateClosedLoop({ ...loop, model })
    return { name, model, margins: margins(model, loop.controller), figures: responseFigures(response), response }
  })
  const badness = (c: DoubtCase) => c.margins.stable ? c.margins.maximumSensitivity : 1e9 - c.margins.gainMargin
  let worst = 0
  cases.forEach((c, i) => { if (badness(c) > badness(cases[worst])) worst = i })
  return { cases, worst }
}
