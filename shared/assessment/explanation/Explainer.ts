import type { Explanation, MeasureKey, Measures, TimeSpan, Withheld } from '../types'
import { MEASURE_TEXTS } from './measureTexts'

type Details = Record<string, number | string | null>

/** Collects figures with how they were made, and the reasons of those that are not there. */
export class Explainer {
  readonly measures: Measures
  readonly explanations: Explanation[] = []
  readonly withheld: Withheld[] = []

  constructor(private readonly window: TimeSpan) {
    this.measures = Object.fromEntries(Object.keys(MEASURE_TEXTS).map(k => [k, null])) as unknown as Measures
  }

  /** A figure; a value that is no number is withheld with the reason given instead. */
  set(measure: MeasureKey, value: number | null | undefined, samples: number, parameters: Details, intermediates: Details, orElse = 'Too few usable samples.', window = this.window): void {
    if (value === null || value === undefined || !Number.isFinite(value)) return this.withhold(measure, orElse)
    this.measures[measure] = value
    this.explanations.push({ measure, ...MEASURE_TEXTS[measure], window, samples, parameters: rounded(parameters), intermediates: rounded(intermediates) })
  }

  withhold(measure: MeasureKey, reason: string): void {
    if (this.measures[measure] === null && !this.withheld.some(w => w.measure === measure)) this.withheld.push({ measure, reason })
  }

  withholdAll(measures: MeasureKey[], reason: string): void {
    for (const m of measures) this.withhold(m, reason)
  }
}

/** Nine digits are enough to repeat a figure, and JSON has no NaN. */
function rounded(details: Details): Details {
  const out: Details = {}
  for (const [k, v] of Object.entries(details)) out[k] = typeof v === 'number' ? (Number.isFinite(v) ? Number(v.toPrecision(9)) : null) : v
  return out
}
