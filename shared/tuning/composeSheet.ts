import type { Verdict } from '../assessment/types'
import { robustnessToDoubt } from '../control/robustness/robustnessToDoubt'
import { changeCautions, type Caution } from '../control/safety/changeCautions'
import { valveTravelFromNoise } from '../control/simulation/valveTravelFromNoise'
import type { DisplayedController, IdealPid, ProcessModel } from '../control/types'
import { formatDuration } from '../format/duration'
import { formatNumber } from '../format/number'
import type { MakeSheetInput } from '../schemas/tuning'
import type { ChangeSheet } from '../types/tuning'
import { deskFigures, horizonFor, type DeskFigures } from './deskTunings'
import { noiseFor } from './noiseFor'
import { idealOf } from './storedController'

export interface SheetAround { loop: ChangeSheet['loop'], asFound: DisplayedController | null, verdict: Verdict | null, verdictConfidence: number | null }

/** Cautions of a change, from the model, the margins and the verdict; the desk and the sheet say the same. */
export function cautionsOf(change: { model: ProcessModel, present: IdealPid | null, proposed: IdealPid, verdict: Verdict | null, origin: 'data' | 'typedIn', noise: { standardDeviation: number, intervalS: number } | null, withinDomain?: boolean, figures: DeskFigures, reachesOutputLimit?: boolean }): Caution[] {
  const { model, present, proposed, noise } = change
  const horizon = horizonFor(model, [proposed])
  const { cases, worst } = robustnessToDoubt({ model, controller: proposed, horizon, maximumSteps: 500, setpoint: { at: 0, size: 1 } })
  const travel = (c: IdealPid) => valveTravelFromNoise(model, c, { standardDeviation: noise!.standardDeviation, interval: noise!.intervalS, normal: noiseFor() })
  const compared = present && noise && noise.standardDeviation > 0 && change.figures.stable ? travel(proposed) / travel(present) : undefined
  return changeCautions({
    present, proposed, model, verdict: change.verdict ?? undefined, modelStatus: change.origin === 'typedIn' ? 'typedIn' : 'ok', withinDomain: change.withinDomain, reachesOutputLimit: change.reachesOutputLimit,
    margins: cases[0].margins, worstMargins: cases[worst].margins, ...(Number.isFinite(compared) && { noiseTravelRatio: compared }),
  })
}

/**
 * A change sheet from what the engineer chose. The benefit is computed here and not taken from the page, so that the
 * figure that the proof will be held to has one maker.
 * @returns the sheet, or why the change must not be carried out
 */
export function composeSheet(input: MakeSheetInput, { loop, asFound, verdict, verdictConfidence }: SheetAround): { status: 'ok', sheet: ChangeSheet } | { status: 'refused', path: string, reason: string } {
  const proposed = idealOf(input.proposed)
  if (proposed.status === 'impossible') return { status: 'refused', path: 'proposed', reason: proposed.reason }
  const found = asFound && idealOf(asFound)
  const present = found?.status === 'ok' ? found.value : null
  const model = input.model.process
  const noise = input.noise ? { standardDeviation: input.noise.standardDeviation, intervalS: input.noise.intervalS } : null
  const horizon = horizonFor(model, present ? [present, proposed.value] : [proposed.value])
  const now = present && deskFigures(model, present, horizon, noise)
  const then = deskFigures(model, proposed.value, horizon, noise, input.setpointFilterTimeS)
  const cautions = cautionsOf({ model, present, proposed: proposed.value, verdict, origin: input.model.origin, noise, withinDomain: input.withinDomain, figures: then })
  const forbidden = cautions.find(c => c.level === 'stop' && (c.code === 'unstable' || c.code === 'wrongAction'))
  if (forbidden) return { status: 'refused', path: 'proposed', reason: forbidden.sentence }

  const ratio = (key: 'loadIae' | 'setpointIae') => now && now.stable && now[key] > 0 ? then[key] / now[key] : null
  const expectedIaeRatio = ratio('loadIae')
  const sentence = !present
    ? 'The tuning as found is not known, so no benefit can be predicted.'
    : !now!.stable
        ? 'By the model the loop as found is not stable; as proposed it settles. How much smaller the error gets cannot be told from the model.'
        : `After an upset of the load the error is expected to add up to ${formatNumber(expectedIaeRatio! * 100, 2)} % of what it does now.`
  const rows: { name: string, of: (f: DeskFigures) => string }[] = [
    { name: 'Largest sensitivity Ms', of: f => f.stable ? formatNumber(f.maximumSensitivity) : 'not stable' },
    { name: 'Gain margin', of: f => f.gainMargin === Infinity ? 'no limit' : formatNumber(f.gainMargin) },
    { name: 'Phase margin', of: f => f.phaseMarginDeg === Infinity ? 'no limit' : `${formatNumber(f.phaseMarginDeg)}°` },
    { name: 'Delay margin', of: f => f.delayMargin === Infinity ? 'no limit' : formatDuration(f.delayMargin) },
    { name: `IAE after a load step of 1 %, ${loop.pvUnit || 'PV unit'} s`, of: f => f.stable ? formatNumber(f.loadIae * (loop.pvHigh - loop.pvLow) / 100) : 'not stable' },
    { name: 'Overshoot after a set-point step', of: f => f.stable ? `${formatNumber(f.overshootPercent, 2)} %` : 'not stable' },
  ]
  if (noise && noise.standardDeviation > 0) rows.push({ name: 'Valve travel from noise, % per h', of: f => formatNumber(f.noiseTravelPerHour, 2) })
  return {
    status: 'ok',
    sheet: {
      loop, week: input.week ?? null, verdict, verdictConfidence, asFound, asProposed: input.proposed, rule: input.rule, ruleSource: input.ruleSource ?? null, setpointFilterTimeS: input.setpointFilterTimeS,
      model: { origin: input.model.origin, process: model, fitPercent: input.model.fitPercent ?? null, note: input.model.note },
      reasons: input.reasons,
      benefit: {
        expectedIaeRatio, setpointIaeRatio: ratio('setpointIae'), sentence, figures: rows.map(r => ({ name: r.name, asFound: now ? r.of(now) : '–', asProposed: r.of(then) })),
        method: `Simulated with the model over ${formatDuration(horizon)}, without output limits, noise and stiction; IAE is the integral of the absolute control error.`,
      },
      cautions, stopCriteria: input.stopCriteria, wayBack: input.wayBack, changeNumber: input.changeNumber ?? null,
    },
  }
}
