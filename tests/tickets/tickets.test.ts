import { describe, expect, it } from 'vitest'
import { VERDICTS } from '../../shared/assessment/types'
import { deadBand } from '../../shared/tickets/deadBand'
import { fieldChecks } from '../../shared/tickets/fieldChecks'
import { legalMoves, objectionToMove } from '../../shared/tickets/moves'
import { objectionToOutcome } from '../../shared/tickets/outcomes'
import { TICKET_STATES } from '../../shared/types/tickets'

const engineer = { role: 'engineer' as const, isAssignee: false }
const assignee = { role: 'technician' as const, isAssignee: true }
const otherTechnician = { role: 'technician' as const, isAssignee: false }
const viewer = { role: 'viewer' as const, isAssignee: false }
const nothing = { assignee: false, reason: false }

describe('moves of a ticket', () => {
  it('leads from open to closed by the road of the product, and by no other', () => {
    const road = ['open', 'assigned', 'inWork', 'toVerify', 'closed'] as const
    for (let k = 0; k + 1 < road.length; k++) expect(legalMoves(road[k]!, engineer)).toContain(road[k + 1])
    expect(legalMoves('open', engineer)).not.toContain('closed')
    expect(legalMoves('inWork', engineer)).not.toContain('closed')
    expect(legalMoves('closed', engineer)).toEqual([])
  })
  it('lets the assigned technician begin and hand back, another one nothing, a viewer nothing', () => {
    expect(legalMoves('assigned', assignee)).toEqual(['inWork'])
    expect(legalMoves('inWork', assignee)).toEqual(['toVerify'])
    expect(legalMoves('toVerify', assignee)).toEqual([])
    for (const state of TICKET_STATES) {
      expect(legalMoves(state, otherTechnician)).toEqual([])
      expect(legalMoves(state, viewer)).toEqual([])
    }
  })
  it('says what stands in the way', () => {
    expect(objectionToMove('open', 'assigned', engineer, nothing)?.code).toBe('needs_assignee')
    expect(objectionToMove('open', 'dropped', engineer, nothing)?.code).toBe('needs_reason')
    expect(objectionToMove('open', 'dropped', engineer, { assignee: false, reason: true })).toBeNull()
    expect(objectionToMove('open', 'toVerify', engineer, nothing)?.code).toBe('illegal_move')
    expect(objectionToMove('assigned', 'inWork', otherTechnician, nothing)?.code).toBe('not_allowed')
  })
})

describe('outcome against proof', () => {
  it('refuses to call a loop repaired where the data say otherwise or cannot tell', () => {
    for (const outcome of ['retuned', 'valveRepaired', 'sensorRepaired', 'processChanged'] as const) {
      expect(objectionToOutcome(outcome, { verdict: 'better' })).toBeNull()
      expect(objectionToOutcome(outcome, { verdict: 'worse' })?.code).toBe('proof_says_otherwise')
      expect(objectionToOutcome(outcome, { verdict: 'noChange' })?.code).toBe('proof_says_otherwise')
      expect(objectionToOutcome(outcome, { verdict: 'cannotTell' })?.code).toBe('proof_missing')
    }
    expect(objectionToOutcome('workedAround', { verdict: 'noChange' })).toBeNull()
    expect(objectionToOutcome('notAProblem', { verdict: 'worse' })?.code).toBe('proof_says_otherwise')
  })
})

describe('field checks', () => {
  it('asks for at most six answers, begins with the operator and ends with as left, for every verdict', () => {
    for (const verdict of VERDICTS) {
      const checks = fieldChecks(verdict)
      expect(checks[0]!.id).toBe('operator')
      expect(checks[checks.length - 1]!.id).toBe('asLeft')
      expect(checks.filter(c => c.required).length).toBeLessThanOrEqual(6)
      expect(new Set(checks.map(c => c.id)).size).toBe(checks.length)
    }
  })
  it('puts the valve test on the list where a sticking valve is the verdict, with its caution', () => {
    expect(fieldChecks('huntingValve').find(c => c.id === 'valveSteps')?.caution).toContain('operator')
  })
})

describe('deadBand', () => {
  it('is the output travelled from the turn to the first answer (definition of ANSI/ISA-51.1, from memory)', () => {
    expect(deadBand({ step: 0.5, firstAnswerUp: 51, highest: 52, firstAnswerDown: 49.5 })).toEqual({ deadBand: 2.5, uncertainty: 0.5 })
  })
  it('refuses figures that cannot come from the test', () => {
    expect(() => deadBand({ step: 0, firstAnswerUp: 51, highest: 52, firstAnswerDown: 49 })).toThrow(/step/)
    expect(() => deadBand({ step: 0.5, firstAnswerUp: 53, highest: 52, firstAnswerDown: 49 })).toThrow(/highest/)
    expect(() => deadBand({ step: 0.5, firstAnswerUp: 51, highest: 52, firstAnswerDown: 53 })).toThrow(/exceed/)
  })
})
