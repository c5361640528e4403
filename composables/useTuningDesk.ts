import { computed, reactive, ref, shallowRef, watch, type ComputedRef } from 'vue'
import { robustnessToDoubt, type ModelIntervals } from '#shared/control/robustness/robustnessToDoubt'
import { speedSlider } from '#shared/control/rules/speedSlider'
import type { Caution } from '#shared/control/safety/changeCautions'
import type { DisplayedController, IdealPid, ProcessModel } from '#shared/control/types'
import { cautionsOf } from '#shared/tuning/composeSheet'
import { deskPreview } from '#shared/tuning/deskPreview'
import { deskFigures, deskTunings, horizonFor, type DeskFigures, type DeskTuning } from '#shared/tuning/deskTunings'
import { idealOf, storedController } from '#shared/tuning/storedController'
import type { LoopPage } from '~/shared/types/loopPage'

export interface ChosenModel {
  process: ProcessModel
  origin: 'data' | 'typedIn'
  fitPercent: number | null
  note: string
  intervals: ModelIntervals
}

/** The desk of one loop: model, slider, choice and conditions in; tunings, figures, preview, doubt and cautions out. Everything in % of span and s. */
export function useTuningDesk(loop: ComputedRef<LoopPage | null>) {
  const model = shallowRef<ChosenModel | null>(null)
  /** measurement noise in PV units, and where the loop stands in % of span */
  const noise = shallowRef<{ standardDeviation: number, intervalS: number } | null>(null)
  const start = shallowRef({ pv: 50, op: 50 })
  const position = ref(0.7)
  const choice = ref('')
  const own = shallowRef<DisplayedController | null>(null)
  const showKnown = ref(false)
  const options = reactive({ setpointWeight: 1, setpointFilterTime: 0, derivativeFilterFactor: 10, measurementFilterTime: 0, setpointChange: 5, loadChange: 5, noise: false, stiction: false, stickBand: 2, door: false, allowedDeviation: 10, largestUpset: 10 })

  const config = computed(() => loop.value?.configuration ?? null)
  const verdict = computed(() => loop.value?.assessment?.verdict ?? null)
  const span = computed(() => ({ pv: (config.value?.pvHigh ?? 100) - (config.value?.pvLow ?? 0), op: (config.value?.opHigh ?? 100) - (config.value?.opLow ?? 0) }))
  const shownPresent = computed(() => (config.value ? storedController(config.value) : null))
  const presentIdeal = computed(() => (shownPresent.value ? idealOf(shownPresent.value) : null))
  const present = computed(() => (presentIdeal.value?.status === 'ok' ? presentIdeal.value.value : null))
  const like = computed(() => ({ form: config.value?.form === 'onOff' || !config.value ? 'ideal' as const : config.value.form, gainUnit: config.value?.gainUnit ?? 'gain' as const, timeUnit: config.value?.timeUnit ?? 's' as const }))
  const noisePercent = computed(() => (noise.value ? { standardDeviation: noise.value.standardDeviation / span.value.pv * 100, intervalS: noise.value.intervalS } : null))
  watch(() => [config.value?.tag, config.value?.version, verdict.value], () => {
    options.setpointWeight = config.value?.setpointWeight ?? 1
    options.measurementFilterTime = config.value?.filterTimeS ?? 0
    options.stiction = verdict.value === 'huntingValve'
    options.stickBand = Number((loop.value?.assessment?.measures.apparentStiction ?? 2).toPrecision(2))
    own.value = null
  }, { immediate: true })
  watch(model, () => { own.value = null; choice.value = '' })

  const process = computed(() => model.value?.process ?? null)
  /** one horizon for all figures of a model, so that the slider moves nothing that it is not asked to */
  const figureHorizon = computed(() => {
    if (!process.value) return 1
    const slow = deskTunings(process.value, 0, like.value).find(t => t.ideal)?.ideal
    return horizonFor(process.value, [slow, present.value].filter(c => c !== null && c !== undefined))
  })
  const tunings = computed<DeskTuning[]>(() => {
    if (!process.value) return []
    const level = config.value?.type === 'level' ? { largestUpset: options.largestUpset, allowedDeviation: options.allowedDeviation } : undefined
    const base = { source: '', domain: '', withinDomain: true, closedLoopTime: null, reason: '' }
    const rows = deskTunings(process.value, position.value, like.value, level)
    const now: DeskTuning[] = shownPresent.value ? [{ ...base, key: 'present', name: 'As found', group: 'present', ideal: present.value, shown: { status: 'ok', value: shownPresent.value }, reason: presentIdeal.value?.status === 'impossible' ? presentIdeal.value.reason : '' }] : []
    const typed = own.value && idealOf(own.value)
    const mine: DeskTuning[] = own.value ? [{ ...base, key: 'own', name: 'Own numbers', group: 'own', ideal: typed!.status === 'ok' ? typed!.value : null, shown: { status: 'ok', value: own.value }, reason: typed!.status === 'impossible' ? typed!.reason : '' }] : []
    return [...now, ...rows.filter(r => r.group === 'advised'), ...mine, ...rows.filter(r => r.group === 'known')]
  })
  const known = new Map<string, DeskFigures>()
  watch([model, noisePercent, figureHorizon], () => known.clear())
  function figuresOf(t: DeskTuning): DeskFigures | null {
    if (!process.value || !t.ideal || (t.group === 'known' && !showKnown.value)) return null
    const key = JSON.stringify([t.ideal, figureHorizon.value])
    let figures = known.get(key)
    if (!figures) {
      if (known.size > 300) known.clear()
      known.set(key, figures = deskFigures(process.value, t.ideal, figureHorizon.value, noisePercent.value))
    }
    return figures
  }
  const rows = computed(() => tunings.value.map(tuning => ({ tuning, figures: figuresOf(tuning) })))
  const selectable = (t: DeskTuning) => t.group !== 'present' && t.ideal !== null && t.shown?.status === 'ok'
  const selected = computed(() => tunings.value.find(t => t.key === choice.value && selectable(t)) ?? tunings.value.find(selectable) ?? null)
  const closedLoopTime = computed(() => (process.value ? speedSlider(process.value, position.value) : null))

  /** what would go into the control system, with weight and filters as set on the desk */
  const proposed = computed<{ shown: DisplayedController, ideal: IdealPid } | null>(() => {
    const t = selected.value
    if (!t?.ideal || t.shown?.status !== 'ok') return null
    const extras = { setpointWeight: options.setpointWeight, derivativeFilterFactor: options.derivativeFilterFactor, measurementFilterTime: options.measurementFilterTime }
    return { shown: { ...t.shown.value, ...extras }, ideal: { ...t.ideal, ...extras } }
  })
  const horizon = computed(() => (process.value && proposed.value ? horizonFor(process.value, [proposed.value.ideal, ...(present.value ? [present.value] : [])]) : 1))
  const preview = computed(() => {
    if (!process.value || !proposed.value) return null
    const room = (change: number, from: number) => (from + change > 95 ? -change : change)
    return deskPreview([
      ...(present.value ? [{ name: 'as found', ideal: present.value, setpointFilterTime: 0 }] : []),
      { name: 'as proposed', ideal: proposed.value.ideal, setpointFilterTime: options.setpointFilterTime },
    ], {
      model: process.value, horizon: horizon.value, start: start.value, setpointChange: room(options.setpointChange, start.value.pv), loadChange: options.loadChange,
      noise: options.noise ? noisePercent.value : null, valve: options.stiction ? { stickBand: options.stickBand, slipJump: options.stickBand / 2 } : null,
      door: options.door ? { openFor: Math.max(process.value.deadTime, horizon.value / 40), airDrop: options.loadChange / 2 } : null,
    })
  })
  const proposedFigures = computed(() => (process.value && proposed.value ? deskFigures(process.value, proposed.value.ideal, figureHorizon.value, noisePercent.value, options.setpointFilterTime) : null))

  // what takes longer follows when the slider rests
  const doubt = shallowRef<ReturnType<typeof robustnessToDoubt> | null>(null)
  const cautions = shallowRef<Caution[]>([])
  let later: ReturnType<typeof setTimeout> | undefined
  watch([process, proposed, verdict, () => options.loadChange], () => {
    clearTimeout(later)
    later = setTimeout(() => {
      if (!process.value || !proposed.value) { doubt.value = null; cautions.value = []; return }
      doubt.value = robustnessToDoubt({ model: process.value, controller: proposed.value.ideal, horizon: horizon.value, maximumSteps: 1500, upsets: [{ at: 0.04 * horizon.value, size: options.loadChange }] }, model.value!.intervals)
      cautions.value = cautionsOf({ model: process.value, present: present.value, proposed: proposed.value.ideal, verdict: verdict.value, origin: model.value!.origin, noise: noisePercent.value, withinDomain: selected.value?.withinDomain, figures: proposedFigures.value!, reachesOutputLimit: preview.value?.setpoint.at(-1)?.reachesLimit || preview.value?.load.at(-1)?.reachesLimit })
    }, 160)
  }, { immediate: true })

  return { model, noise, start, position, choice, own, showKnown, options, config, verdict, span, like, shownPresent, present, presentIdeal, noisePercent, process, rows, selected, selectable, closedLoopTime, proposed, proposedFigures, horizon, preview, doubt, cautions }
}
export type TuningDesk = ReturnType<typeof useTuningDesk>
