import type { Outcome, TicketProof } from '../types/tickets'

/** Outcomes that claim that the loop is better now. */
const claimsBetter: readonly Outcome[] = ['retuned', 'valveRepaired', 'sensorRepaired', 'processChanged']

/** null when outcome and proof agree, else what contradicts, as a sentence that asks for a reason. */
export function objectionToOutcome(outcome: Outcome, proof: Pick<TicketProof, 'verdict'>): { code: 'proof_says_otherwise' | 'proof_missing', message: string } | null {
  if (claimsBetter.includes(outcome)) {
    if (proof.verdict === 'worse') return { code: 'proof_says_otherwise', message: 'The data after the work are worse than before. Close it with a reason, or send it back.' }
    if (proof.verdict === 'noChange') return { code: 'proof_says_otherwise', message: 'The data show no change beyond chance. Close it with a reason, or wait for more data.' }
    if (proof.verdict === 'cannotTell') return { code: 'proof_missing', message: 'The data cannot tell yet whether the work helped. Close it with a reason, or wait for more data.' }
  }
  if (outcome === 'notAProblem' && proof.verdict === 'worse') return { code: 'proof_says_otherwise', message: 'The loop has become worse since the ticket was opened. Say why this is not a problem.' }
  return null
}
