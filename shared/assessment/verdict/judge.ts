import type { EvidenceItem, Finding, LoopSetup, Measures, Oscillation, Verdict } from '../types'
import type { Ledger } from '../ledger/buildLedger'
import { NEXT_ACTIONS, type NextActions } from './nextActions'

export interface Facts {
  setup: LoopSetup
  measures: Measures
  ledger: Ledger
  oscillations: Oscillation[]
  hasSetpoint: boolean
}

export interface Judgement {
  verdict: Verdict
  confidence: number
  verdictReason: string
  findings: Finding[]
  evidence: EvidenceItem[]
  nextActions: NextActions
}

/** Data first, then mode, then limits, then oscillation, then cause. */
export function judge({ ledger }: Facts): Judgement {
  const { hours } = ledger
  const findings: Finding[] = []
  const add = (verdict: Verdict, h: number, confidence: number, text: string) => {
    if (h > 0) findings.push({ verdict, confidence, hours: h, evidence: [{ measure: `hours ${verdict}`, value: h, threshold: null, says: 'for', weight: 2, source: 'Week ledger', text }] })
  }
  add('sensor', hours.sensor, 0.9, `PV was frozen, bad or out of range for ${hours.sensor} h.`)
  add('manual', hours.manual, 0.95, `Outside its normal modes for ${hours.manual} h.`)
  add('saturated', hours.saturated, 0.95, `The output stood at a limit for ${hours.saturated} h.`)
  add('cannotTell', hours.hunting, 0.5, `The loop hunted for ${hours.hunting} h.`)
  findings.sort((a, b) => b.hours - a.hours)
  const top = findings[0]
  const verdict = top?.verdict ?? (hours.steady > 0 ? 'steady' : 'cannotTell')
  return { verdict, confidence: top?.confidence ?? 0.9, verdictReason: top?.evidence[0].text ?? '', findings, evidence: top?.evidence ?? [], nextActions: NEXT_ACTIONS[verdict] }
}
