/**
 * The verdict: data first, then mode, then limits, then oscillation, then cause.
 *
 * What the ledger counts (sensor, manual, saturated) is a fact and needs no likelihood. The causes that have to be inferred get
 * their probability from the likelihood table. Several findings may hold; the verdict is the one that costs most hours, and among
 * inferred causes the most probable. Where the data cannot carry a cause the verdict is `cannotTell`, with the reason.
 * Source: the order of judgement is ours.
 */
import type { EvidenceItem, Finding, LoopSetup, Oscillation, Verdict } from '../types'
import type { Ledger } from '../ledger/buildLedger'
import { AT_HIGH, AT_LOW, FROZEN, OFF_NORMAL, type PreparedRecord } from '../preparation/prepareRecord'
import { EVIDENCE_TEXTS } from './evidenceTexts'
import type { FeatureValues } from './gatherFeatures'
import { posteriorOf, type Posterior } from './likelihoods'
import { NEXT_ACTIONS, type NextActions } from './nextActions'

export interface Facts {
  setup: LoopSetup
  prepared: PreparedRecord
  ledger: Ledger
  features: FeatureValues
  oscillations: Oscillation[]
  /** amplitude from which an oscillation counts as hunting */
  meaningful: number
  /** why the shape of the record cannot be trusted, or null */
  compression: string | null
  /** why the sampling cannot show a cause, or null */
  tooSlow: string | null
  /** why the record is too short to look for patterns, or null */
  tooShort: string | null
  timeInTolerance: number | null
}

export interface Judgement {
  verdict: Verdict
  confidence: number
  verdictReason: string
  findings: Finding[]
  evidence: EvidenceItem[]
  nextActions: NextActions
  /** the inference leans towards a sticking valve, whatever the verdict */
  valveLikely: boolean
}

/** Confidence in what the ledger counts hour by hour: wrong only if mode, limits or range are set up wrongly (ours). */
const COUNTED = 0.97
/** Below this an inferred cause is not named. */
const LEAST_CONFIDENCE = 0.55
/** An accusation of a fault without lost hours, and of a valve at all, needs more. */
const LEAST_WITHOUT_LOSS = 0.7
const LEAST_VALVE = 0.65

/** A single stroke can be a load step that came at the wrong time: it is named only when all else fits (ours). */
const LEAST_ONE_STROKE = 0.8

const SUREST_ALONE = 0.92
/** That a cause cannot be told is itself no estimate (ours). */
const CANNOT_TELL = 0.9
/** Noise is a finding of its own from this share of the tolerance (standard deviation; ours). */
const NOISE_THAT_MATTERS = 0.3

const HUNTING: Verdict[] = ['huntingTuning', 'huntingValve', 'huntingExternal']

const STATEMENTS: Readonly<Record<Verdict, string>> = {
  steady: 'The loop does its work.',
  huntingTuning: 'The loop hunts, most likely because it is tuned too tight.',
  huntingValve: 'The loop hunts, most likely because its valve sticks.',
  huntingExternal: 'The loop hunts, most likely with a rhythm carried in from elsewhere.',
  sluggish: 'The loop works off upsets too slowly.',
  saturated: 'The output stands at a limit.',
  manual: 'The loop is left outside its normal modes.',
  sensor: 'The reading is doubtful.',
  noise: 'Noise dominates the error.',
  cannotTell: 'The cause cannot be told.',
}

const UNEVEN_VALVE = 'The valve most likely sticks, though the loop does not swing evenly.'

export function judge(facts: Facts): Judgement {
  const { setup, ledger, features, oscillations, compression, tooSlow, tooShort, prepared } = facts
  const { hours } = ledger
  const inRecord = ledger.states.length - hours.noData - hours.down
  if (prepared.n === 0) return cannotTell('There is no sample in this week.', [], false)
  if (inRecord === 0 && hours.down > 0) return cannotTell('The loop was down, or its data are missing, all week.', [], false)
  const counted: Finding[] = inRecord === 0 ? countedInShortRecord(prepared) : [
    countedFinding('sensor', hours.sensor, inRecord, `PV was frozen, bad or out of range for ${h(hours.sensor)}.`),
    countedFinding('manual', hours.manual, inRecord, `The loop was outside its normal modes for ${h(hours.manual)}.`),
    countedFinding('saturated', hours.saturated, inRecord, `The output stood at a limit for ${h(hours.saturated)}.`),
  ].filter(f => f.hours > 0).sort((a, b) => b.hours - a.hours)
  // an hour or two of manual in a week is daily work, not a verdict; a dead sensor or a limit weighs more in a short record
  const least = (v: Verdict) => Math.max(0.04 * inRecord, v === 'manual' ? Math.min(2, inRecord) : Math.min(2, Math.max(1, 0.2 * inRecord)))
  const worst = inRecord === 0 ? counted[0] : counted.find(f => f.hours >= least(f.verdict))

  const posterior = posteriorOf(features)
  const inferred = inferredFinding(facts, posterior)
  const valveLikely = posterior.probability[posterior.classes.indexOf('huntingValve')] >= 0.5 && !compression && !tooSlow
  const findings = [...counted]

  let soft: Judgement | null = null
  if (tooShort) {
    if (!worst) return cannotTell(tooShort, findings, false)
  }
  else if (compression) soft = cannotTell(compression, [], false)
  else if (tooSlow) soft = cannotTell(tooSlow, [], false)
  else if (setup.form === 'onOff') soft = onOff(facts)
  else soft = inferred

  if (soft) {
    const softHours = soft.findings[0]?.hours ?? 0
    if (worst && (inRecord === 0 || worst.hours >= Math.max(softHours, 1))) {
      findings.push(...soft.findings.filter(f => f.hours > 0 || (f.verdict !== 'steady' && f.confidence >= LEAST_WITHOUT_LOSS)))
    }
    else {
      const all = unique([...soft.findings, ...counted].sort((a, b) => b.hours - a.hours))
      const first = all.findIndex(f => f.verdict === soft!.verdict)
      if (first > 0) all.unshift(...all.splice(first, 1))
      return { ...soft, findings: all, valveLikely }
    }
  }
  if (!worst) return cannotTell('The data do not allow more.', findings, false)
  findings.sort((a, b) => b.hours - a.hours)
  const others = oscillations.length > 0 && hours.hunting > 0 ? ` It also hunted for ${h(hours.hunting)}.` : ''
  return {
    verdict: worst.verdict, confidence: worst.confidence, verdictReason: `${worst.evidence[0].text}${others}`,
    findings: unique(findings), evidence: worst.evidence, nextActions: NEXT_ACTIONS[worst.verdict], valveLikely,
  }
}

/** One finding a verdict: the one with more hours, which comes first. */
const unique = (findings: Finding[]): Finding[] => findings.filter((f, i) => findings.findIndex(o => o.verdict === f.verdict) === i)

const h = (hours: number): string => `${hours} h`

function countedFinding(verdict: Verdict, hours: number, inRecord: number, text: string): Finding {
  const share = hours / inRecord
  return {
    verdict, hours, confidence: COUNTED,
    evidence: [{ measure: 'Hours in the week ledger', value: hours, threshold: null, says: 'for', weight: Number(Math.log((0.03 + share) / 0.03).toFixed(2)), source: 'Week ledger', text }],
  }
}

/** A record too short to fill half of an hour: no hour is lost, but what held for most of it still speaks first. */
function countedInShortRecord({ flags, pv, n }: PreparedRecord): Finding[] {
  let manual = 0
  let limit = 0
  let sensor = 0
  for (let i = 0; i < n; i++) {
    if (flags[i] & OFF_NORMAL) manual++
    if (flags[i] & (AT_LOW | AT_HIGH)) limit++
    if (pv[i] !== pv[i] || (flags[i] & FROZEN) !== 0) sensor++
  }
  const of = (verdict: Verdict, count: number, text: string): Finding[] => count > n / 2 ? [{ ...countedFinding(verdict, 0, 1, text), evidence: [{ measure: 'Share of the record', value: round(count / n), threshold: 0.5, says: 'for', weight: 2, source: 'Definition', text }] }] : []
  return [
    ...of('sensor', sensor, 'PV was frozen, bad or out of range for most of the record.'),
    ...of('manual', manual, 'The loop was outside its normal modes for most of the record.'),
    ...of('saturated', limit, 'The output stood at a limit for most of the record.'),
  ]
}

/** What the likelihood table says, turned into a verdict or into the reason why there is none. */
function inferredFinding(facts: Facts, posterior: Posterior): Judgement {
  const { ledger, oscillations, meaningful, prepared, features } = facts
  const { hours } = ledger
  const { classes, probability } = posterior
  const order = classes.map((_, c) => c).sort((a, b) => probability[b] - probability[a])
  const hoursOf = (v: Verdict) => (HUNTING.includes(v) ? hours.hunting : v === 'steady' ? 0 : hours.offTarget)
  // only the other loops of the group can prove that a rhythm comes from elsewhere
  const sure = (c: number) => round(classes[c] === 'huntingExternal' ? Math.min(SUREST_ALONE, probability[c]) : probability[c])
  const finding = (c: number): Finding => ({ verdict: classes[c], confidence: sure(c), hours: hoursOf(classes[c]), evidence: evidenceOf(facts, posterior, c) })
  const top = order[0]
  const verdict = classes[top]
  const p = probability[top]
  const others = order.slice(1).filter(c => probability[c] >= 0.25).map(finding)
  const hunts = oscillations.some(o => o.amplitude >= meaningful)

  const undecided = (reason: string): Judgement => ({
    ...cannotTell(reason, [{ verdict: 'cannotTell', confidence: CANNOT_TELL, hours: hours.hunting + hours.offTarget, evidence: [], reason }, finding(top), ...others], false),
    evidence: evidenceOf(facts, posterior, top),
  })
  if (!prepared.op && HUNTING.includes(verdict)) return undecided('The loop hunts. Without OP in the record the cause cannot be told.')
  if (p < LEAST_CONFIDENCE) return undecided(`The evidence points two ways: ${NAMES[verdict]} (${percent(p)}) or ${NAMES[classes[order[1]]]} (${percent(probability[order[1]])}).`)
  if (verdict === 'huntingValve' && p < LEAST_VALVE) return undecided(`A sticking valve is possible (${percent(p)}), but not sure enough to name it.`)
  // an uneven or small swing accuses the valve only when the valve itself shows a mark
  if (verdict === 'huntingValve' && !(hunts && features.regularity > 0) && !valveMark(features, p)) return undecided(`A sticking valve is possible (${percent(p)}), but no test of the valve itself speaks for it.`)
  if (HUNTING.includes(verdict) && !hunts && p < LEAST_WITHOUT_LOSS) return undecided('There is a small swing whose cause is not clear.')
  // jumps that are too few or too doubtful to name the valve, and too many to call the loop sound
  const seen = strokesOf(features) ?? (features.slipCount >= 2 && features.slipShare >= 0.5 ? { strokes: features.slipCount, share: features.slipShare } : null)
  if (!HUNTING.includes(verdict) && verdict !== 'sensor' && seen && seen.strokes >= 2 && seen.share >= 0.5 && probability[classes.indexOf('huntingValve')] >= 0.2)
    return undecided(`PV stood, then ${features.bendSlips >= 0 ? 'bent' : 'jumped'} the way OP had asked ${seen.strokes} times, as with a sticking valve. That is too little to be sure: check the valve or send a longer record.`)
  const harmless = hours.offTarget > 0 ? null
    : verdict === 'sluggish' ? 'The loop keeps within its tolerance, though it works off upsets slowly.'
      : verdict === 'noise' && !(features.noiseOverTolerance >= NOISE_THAT_MATTERS) ? 'The loop keeps within its tolerance; what is left is mostly noise.'
        : verdict === 'sensor' && !(features.wildShare > 0) ? 'The loop keeps within its tolerance, though its noise comes in bursts.'
          : null
  if (harmless) {
    return { verdict: 'steady', confidence: round(p), verdictReason: harmless, findings: [finding(top), ...others], evidence: evidenceOf(facts, posterior, top), nextActions: NEXT_ACTIONS.steady, valveLikely: false }
  }
  if (verdict === 'steady' && hours.hunting > 0.1 * (hours.hunting + hours.offTarget + hours.steady)) return undecided(`The loop hunted for ${h(hours.hunting)}, but the pattern fits no cause well.`)
  if (verdict === 'steady' && features.offTargetShare > 0.2) return undecided(`The loop was off target for ${h(hours.offTarget)}, without a pattern that names a cause.`)
  if (verdict === 'steady' && hours.steady === 0 && facts.timeInTolerance !== null && facts.timeInTolerance < 0.8) return undecided(`The error was outside the tolerance for ${percent(1 - facts.timeInTolerance)} of the record, without a pattern that names a cause.`)
  const own = finding(top)
  const strokes = strokesOf(features)
  const uneven = strokes ? `PV ${features.bendSlips >= 0 ? 'ran on straight' : 'stood'} while OP moved on, then ${features.bendSlips >= 0 ? 'bent' : 'jumped'} the way OP had asked${strokes.strokes > 1 ? `, ${strokes.strokes} times` : ''}: the valve most likely sticks.` : UNEVEN_VALVE
  const extra = own.hours > 0 ? ` It cost ${h(own.hours)}.` : verdict === 'steady' ? '' : ' It cost no hour so far.'
  return {
    verdict, confidence: own.confidence, verdictReason: (verdict === 'huntingValve' && !oscillations.length ? uneven : STATEMENTS[verdict]) + extra, findings: [own, ...others],
    evidence: own.evidence, nextActions: NEXT_ACTIONS[verdict], valveLikely: false,
  }
}

/** Single strokes, looked for in short records; null where they were not, or none was seen. */
function strokesOf(f: FeatureValues): { strokes: number, share: number } | null {
  if (f.jumpSlips >= 1) return { strokes: f.jumpSlips, share: f.jumpSlipShare }
  return f.bendSlips >= 1 ? { strokes: f.bendSlips, share: f.bendSlipShare } : null
}

/**
 * A mark that only a sticking valve leaves: slips, strokes, stand and jump, a clear gain of the sticking stem, or a swing that stops in manual.
 * @param p its probability
 */
function valveMark(f: FeatureValues, p: number): boolean {
  const seen = strokesOf(f)
  if (seen && seen.share >= 0.3 && (seen.strokes >= 2 || p >= LEAST_ONE_STROKE)) return true
  return (f.slipCount >= 2 && f.slipShare >= 0.3) || (f.standingTravel > 0.55 && f.jumpShare > 0.55) || f.runGain > 1 || (f.stickGain > 0.05 && f.stickExplained > 0.5) || f.manualSwing < 0.3
}

const NAMES: Readonly<Record<Verdict, string>> = {
  steady: 'no trouble', huntingTuning: 'tight tuning', huntingValve: 'a sticking valve', huntingExternal: 'a rhythm carried in', sluggish: 'sluggish tuning',
  saturated: 'a limit', manual: 'manual', sensor: 'a doubtful sensor', noise: 'noise', cannotTell: 'nothing',
}

/**
 * Evidence for one cause against the others: each figure's weight for the cause less its mean weight for the others, by their
 * probability. That is the natural logarithm of the likelihood ratio which the figure adds.
 */
function evidenceOf(facts: Facts, posterior: Posterior, c: number): EvidenceItem[] {
  const rest = 1 - posterior.probability[c]
  const items: EvidenceItem[] = []
  for (const f of posterior.contributions) {
    const x = facts.features[f.name]
    if (x !== x) continue
    let other = 0
    f.perClass.forEach((w, k) => { if (k !== c) other += (posterior.probability[k] / rest) * w })
    const weight = Number((f.perClass[c] - other).toFixed(2))
    const told = EVIDENCE_TEXTS[f.name]
    const edge = f.bin < f.edges.length ? f.edges[f.bin] : f.edges[f.edges.length - 1]
    items.push({
      measure: told.measure, value: Number(x.toPrecision(4)), threshold: edge === undefined ? null : Number(edge.toPrecision(4)),
      says: weight > 0.1 ? 'for' : weight < -0.1 ? 'against' : 'silent', weight, source: told.source, text: told.text(x),
    })
  }
  return items.sort((a, b) => Math.abs(b.weight) - Math.abs(a.weight)).slice(0, 12)
}

/** An on-off loop swings by its nature: only the size of the swing is judged. */
function onOff({ ledger, oscillations, setup }: Facts): Judgement {
  const { hours } = ledger
  const swing = oscillations[0]?.amplitude ?? 0
  const item = (text: string, weight: number): EvidenceItem => ({ measure: 'Swing of the on-off cycle', value: Number(swing.toPrecision(4)), threshold: setup.tolerance, says: 'for', weight, source: 'Common practice, no source', text })
  const judged = hours.hunting + hours.offTarget + hours.steady
  if (hours.hunting + hours.offTarget > 0.1 * judged) {
    const lost = hours.hunting + hours.offTarget
    const evidence = [item(`The on-off cycle left the tolerance in ${h(lost)}.`, 2)]
    return {
      verdict: 'huntingTuning', confidence: 0.8, verdictReason: `The on-off cycle is wider than the tolerance. It cost ${h(lost)}.`,
      findings: [{ verdict: 'huntingTuning', confidence: 0.8, hours: lost, evidence }], evidence,
      nextActions: { ...NEXT_ACTIONS.huntingTuning, engineer: 'Check hysteresis and dead time; a narrower band or time-proportioned PID may hold the tolerance. Change it under management of change.' },
      valveLikely: false,
    }
  }
  const evidence = [item('The on-off cycle stays within the tolerance.', 2)]
  return { verdict: 'steady', confidence: 0.9, verdictReason: 'The on-off cycle stays within the tolerance.', findings: [{ verdict: 'steady', confidence: 0.9, hours: 0, evidence }], evidence, nextActions: NEXT_ACTIONS.steady, valveLikely: false }
}

function cannotTell(reason: string, findings: Finding[], valveLikely: boolean): Judgement {
  const own: Finding[] = findings.some(f => f.verdict === 'cannotTell') ? findings : [{ verdict: 'cannotTell', confidence: CANNOT_TELL, hours: 0, evidence: [], reason }, ...findings]
  return { verdict: 'cannotTell', confidence: own.find(f => f.verdict === 'cannotTell')!.confidence, verdictReason: reason, findings: own, evidence: [], nextActions: NEXT_ACTIONS.cannotTell, valveLikely }
}

const round = (p: number): number => Number(p.toFixed(3))
const percent = (p: number): string => `${Math.round(100 * p)} %`
