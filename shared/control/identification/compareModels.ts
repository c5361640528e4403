import type { ProcessModel } from '../types'
import { fitModel, type FitOptions, type FitStretch, type InsufficientFit, type ModelFit } from './fitModel'

export interface ModelComparison {
  /** The simplest kind that the data support, or the reason why none is. */
  best: ModelFit | InsufficientFit
  /** All kinds tried, the refused ones with their reasons. */
  candidates: { kind: ProcessModel['kind'], fit: ModelFit | InsufficientFit }[]
  /** Why this kind: a sentence. */
  reason: string
}

/**
 * Fits first order, second order and integrating models to the same stretches and picks the kind: an integrator where
 * Bayes' criterion finds the lag superfluous, a second lag where Akaike's asks for it (it must not be missed: a lag fitted
 * alone is then a mixture of two). Where a second lag shows but cannot be told, nothing is recommended.
 * Cost: that of three fits.
 * @throws RangeError as `fitModel`
 * Source: G. Schwarz (1978), Annals of Statistics 6:461-464; H. Akaike (1974), IEEE Trans. Automatic Control 19:716-723; a difference of 4 as "considerably less support": Burnham, Anderson (2002).
 */
export function compareModels(stretches: readonly FitStretch[], options: Omit<FitOptions, 'kind'>): ModelComparison {
  const kinds = ['fopdt', 'sopdt', 'integrating'] as const
  const candidates = kinds.map(kind => ({ kind, fit: fitModel(stretches, { ...options, kind }) }))
  const [first, second, integrating] = candidates.map(c => c.fit)
  const bayes = (fit: ModelFit | InsufficientFit) => fit.status === 'ok' ? fit.criterion : fit.best?.criterion ?? Infinity
  const akaike = (fit: ModelFit | InsufficientFit) => fit.status === 'ok' ? fit.akaike : fit.best?.akaike ?? Infinity
  const used = (fit: ModelFit | InsufficientFit) => fit.status === 'ok' ? fit : fit.best
  const fitPercent = (fit: ModelFit | InsufficientFit) => used(fit)?.fitPercent ?? -Infinity
  const longest = Math.max(...stretches.map(s => s.pv.length)) * options.interval
  const lag = used(first)?.parameters.timeConstant?.value ?? Infinity
  // Criteria look one step ahead; a kind that leaves much more of the long run unexplained is not preferred by them.
  const keepsUp = (fit: ModelFit | InsufficientFit) => first.status !== 'ok' || fitPercent(fit) > fitPercent(first) - 5
  if (keepsUp(integrating) && (bayes(integrating) < Math.min(bayes(first), bayes(second)) || (lag > longest && integrating.status === 'ok'))) {
    return { best: integrating, candidates, reason: 'Over the time of the stretches the process looks like an integrator: a lag adds nothing.' }
  }
  if (keepsUp(second) && (used(first)?.plain === used(second)?.plain ? akaike(second) < akaike(first) - 4 : fitPercent(second) > fitPercent(first) + 1)) {
    if (second.status === 'ok') return { best: second, candidates, reason: 'A second lag explains the response clearly better.' }
    return { best: second, candidates, reason: 'A second lag explains the response better, but the data do not determine it. The model of one lag is an approximation that mixes the two.' }
  }
  return { best: first, candidates, reason: 'One lag and a dead time explain the response; a second lag adds little.' }
}
