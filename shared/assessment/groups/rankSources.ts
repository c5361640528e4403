export interface SourceCandidate {
  tag: string
  strength: number
  /** lag behind an arbitrary reference, s, within half a period */
  lagS: number
  valveEvidence: number
  /** harmonics locked to the fundamental, as a ratio to it; 0 none beyond chance, null not measured */
  nonlinearity: number | null
  upstream: string[]
}
export interface SourceRank { tag: string, score: number, reasons: string[] }

/**
 * Members of a group, likely source first, with the reasons in words. A ranking, not a fact.
 *
 * What counts: nonlinearity of the wave (a limit cycle is most nonlinear at its source, because each process on the
 * way filters the harmonics), the valve's own evidence, the phase along declared upstream links, the share of the
 * variance. Weights are ours; they were set on the simulator only.
 *
 * @param periodS period of the group, s
 * Source: Thornhill (2005), Finding the source of nonlinearity in a process with plant-wide oscillation (nonlinearity
 * as the pointer to the source); the combination is our own.
 */
export function rankSources(candidates: readonly SourceCandidate[], periodS: number): SourceRank[] {
  const most = Math.max(1e-9, ...candidates.map(c => c.nonlinearity ?? 0))
  const strongest = Math.max(1e-9, ...candidates.map(c => c.strength))
  const byTag = new Map(candidates.map(c => [c.tag, c]))
  const ranks = candidates.map((c) => {
    const reasons: string[] = []
    let score = 0
    const nonlinear = Math.max(0, c.nonlinearity ?? 0)
    if (nonlinear > 0) {
      score += 3 * nonlinear / most
      reasons.push(nonlinear === most ? 'its wave is the least sine-like of the group' : 'its wave is less sine-like than chance explains')
    }
    if (Math.abs(c.valveEvidence) > 0.5) {
      score += Math.max(-2, Math.min(3, c.valveEvidence))
      reasons.push(c.valveEvidence > 0 ? 'the valve tests speak for a sticking valve here' : 'the valve tests speak against a sticking valve here')
    }
    const feeds = candidates.filter(o => o.tag !== c.tag && reaches(o, c.tag, byTag))
    const fedBy = candidates.filter(o => o.tag !== c.tag && reaches(c, o.tag, byTag))
    if (feeds.length) {
      score += 1.5 * Math.min(1, feeds.length / Math.max(1, candidates.length - 1)) + 0.5
      reasons.push(`declared upstream of ${feeds.length === 1 ? feeds[0].tag : `${feeds.length} members`}`)
      const later = feeds.filter(o => leads(c.lagS, o.lagS, periodS))
      if (later.length) { score += 0.5 * later.length / feeds.length; reasons.push('it leads those that it feeds') }
    }
    if (fedBy.length) {
      score -= 1
      reasons.push(`fed by ${fedBy.length === 1 ? fedBy[0].tag : `${fedBy.length} members`}`)
    }
    score += c.strength / strongest
    if (c.strength === strongest && candidates.length > 1) reasons.push('the oscillation makes up most of its variance')
    return { tag: c.tag, score, reasons }
  })
  return ranks.sort((a, b) => b.score - a.score || a.tag.localeCompare(b.tag))
}

/** Whether `tag` stands upstream of `loop`, through members of the group. */
function reaches(loop: SourceCandidate, tag: string, byTag: ReadonlyMap<string, SourceCandidate>, seen = new Set<string>()): boolean {
  if (seen.has(loop.tag)) return false
  seen.add(loop.tag)
  return loop.upstream.some(up => up === tag || (byTag.has(up) && reaches(byTag.get(up)!, tag, byTag, seen)))
}

/** Whether a comes less than half a period before b. */
function leads(lagA: number, lagB: number, periodS: number): boolean {
  const turns = (lagB - lagA) / periodS
  const wrapped = turns - Math.round(turns)
  return wrapped > 0.02 && wrapped < 0.5
}
