import { margins, type Margins } from '../margins/margins'
import type { IdealPid } from '../types'
import { responseFigures, type ResponseFigures } from './responseFigures'
import { simulateClosedLoop, type ClosedLoopCase, type ClosedLoopResponse, type Upset } from './simulateClosedLoop'
import { valveTravelFromNoise } from './valveTravelFromNoise'

export interface TuningCandidate { controller: IdealPid, /** s; 0 when left out */ setpointFilterTime?: number }

export interface TuningPreview {
  margins: Margins
  setpoint: { response: ClosedLoopResponse, figures: ResponseFigures }
  load: { response: ClosedLoopResponse, figures: ResponseFigures }
  /** OP unit per hour; null when no noise was given. */
  noiseTravelPerHour: number | null
}

/**
 * Set-point and load response of several tunings under the same conditions, with their figures and margins.
 * Figures are without measurement noise; the curves carry it. Every tuning meets the same noise.
 * @param common conditions; `setpointChange` in PV unit, `upsets` for the load scenario
 * @param normalFor makes a fresh standard normal generator with the same seed each time it is called
 * @throws RangeError as `simulateClosedLoop` and `margins`
 */
export function compareTunings(
  candidates: readonly TuningCandidate[],
  common: Pick<ClosedLoopCase, 'model' | 'horizon' | 'step' | 'start' | 'outputLimits' | 'valve'> & { setpointChange: number, upsets: Upset[], changeAt?: number, noise?: { standardDeviation: number, interval: number, normalFor: () => () => number } },
): TuningPreview[] {
  const { setpointChange, upsets, noise, changeAt = 0, ...loop } = common
  const maximumSteps = common.step === undefined ? 4000 : undefined
  return candidates.map(({ controller, setpointFilterTime }) => {
    const run = (scenario: Partial<ClosedLoopCase>) => {
      const base = { ...loop, maximumSteps, controller, setpointFilterTime, ...scenario }
      const clean = simulateClosedLoop(base)
      const response = noise ? simulateClosedLoop({ ...base, noise: { ...noise, normal: noise.normalFor() } }) : clean
      return { response, figures: responseFigures(clean) }
    }
    return {
      margins: margins(common.model, controller),
      setpoint: run({ setpoint: { at: changeAt, size: setpointChange } }),
      load: run({ upsets }),
      noiseTravelPerHour: noise ? valveTravelFromNoise(common.model, controller, { ...noise, normal: noise.normalFor() }) : null,
    }
  })
}
