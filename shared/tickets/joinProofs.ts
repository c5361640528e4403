import type { LoopProof, TicketProof } from '../types/tickets'

/**
 * What the loops of a ticket say together: worse as soon as one is worse, else better when one is better, else no
 * change, else it cannot be told. Provisional while any loop that says something is.
 */
export function joinProofs(loops: readonly LoopProof[]): Pick<TicketProof, 'verdict' | 'reason' | 'provisional'> {
  const verdict = (['worse', 'better', 'noChange'] as const).find(v => loops.some(l => l.verdict === v)) ?? 'cannotTell'
  const telling = loops.filter(l => l.verdict !== 'cannotTell')
  const provisional = telling.length === 0 || telling.some(l => l.provisional)
  if (loops.length === 0) return { verdict, provisional, reason: 'The ticket has no loop any more.' }
  if (loops.length === 1) return { verdict, provisional, reason: loops[0]!.reason }
  const tags = (v: LoopProof['verdict']) => loops.filter(l => l.verdict === v).map(l => l.tag)
  const parts = ([['worse', 'worse'], ['better', 'better'], ['noChange', 'no change beyond chance'], ['cannotTell', 'cannot tell']] as const)
    .filter(([v]) => tags(v).length).map(([v, words]) => `${words}: ${tags(v).length > 4 ? `${tags(v).length} loops` : tags(v).join(', ')}`)
  return { verdict, provisional, reason: `${parts.join('; ').replace(/^./, c => c.toUpperCase())}.` }
}
