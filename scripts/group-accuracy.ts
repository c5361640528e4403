/**
 * Measures the search for groups on simulated plants: is the planted source of each common oscillation found, at which
 * rank, and how often are loops grouped that have nothing to do with each other. `npm run group-accuracy -- --plants 40`.
 */
import { parseArgs } from 'node:util'
import { assessLoopWeek } from '../shared/assessment/assessLoopWeek'
import { candidatesOfLoop } from '../shared/assessment/groups/candidatesOfLoop'
import { findGroups, type GroupCandidate } from '../shared/assessment/groups/findGroups'
import { mixSeed } from '../shared/assessment/simulation/mixSeed'
import { planPlant } from '../shared/assessment/simulation/planPlant'
import { simulatePlantLoop, type PlantMemory } from '../shared/assessment/simulation/simulatePlant'
import { weekFrame } from '../shared/assessment/week/isoWeek'

const { values } = parseArgs({ options: { plants: { type: 'string', default: '40' }, seed: { type: 'string', default: '9000' }, loops: { type: 'string', default: '30' } } })
const week = weekFrame('2026-W48', 'UTC')
const span = { fromMs: week.hourEdges[0], toMs: week.hourEdges[week.hourEdges.length - 1] }
let planted = 0
let found = 0
let first = 0
let amongThree = 0
let members = 0
let membersFound = 0
let falseGroups = 0
let groupsInAll = 0
let plantsWithFalse = 0
for (let p = 0; p < Number(values.plants); p++) {
  const plan = planPlant({ loops: Number(values.loops), days: 7, intervalS: 10, seed: mixSeed(Number(values.seed), p), startMs: span.fromMs, mix: 'plant' })
  const sources = new Set(plan.flatMap(l => l.carriedFrom.map(c => c.source)))
  const memory: PlantMemory = new Map()
  const candidates: GroupCandidate[] = []
  for (const [index, loop] of plan.entries()) {
    const { record } = simulatePlantLoop(plan, index, memory)
    const a = assessLoopWeek(record, loop.setup, week, [])
    candidates.push(...candidatesOfLoop({ tag: loop.setup.tag, upstream: loop.setup.upstream, oscillations: a.oscillations, findings: a.findings }, record, span))
  }
  const groups = findGroups(candidates, span)
  groupsInAll += groups.length
  const claimed = new Set<number>()
  for (const source of sources) {
    const reached = plan.map(l => (l.carriedFrom.some(c => c.source === source) ? l.setup.tag : null)).filter((t): t is string => t !== null)
    const tag = plan[source].setup.tag
    // a source that cannot be heard in any other loop cannot be grouped
    const audible = reached.filter(t => candidates.some(c => c.tag === t))
    if (!candidates.some(c => c.tag === tag) || audible.length === 0) continue
    planted++
    members += audible.length
    const at = groups.findIndex(g => g.members.some(m => m.tag === tag) && g.members.some(m => reached.includes(m.tag)))
    if (at < 0) continue
    claimed.add(at)
    found++
    const group = groups[at]
    const rank = group.members.findIndex(m => m.tag === tag)
    if (rank === 0) first++
    if (rank < 3) amongThree++
    membersFound += group.members.filter(m => reached.includes(m.tag)).length
    if (rank > 0) console.log(`plant ${p}: source ${tag} at rank ${rank + 1} behind ${group.members.slice(0, rank).map(m => `${m.tag} (${m.reasons.join('; ')})`).join(', ')}`)
  }
  const family = (tag: string) => { const i = plan.findIndex(l => l.setup.tag === tag); return new Set([i, ...plan[i].carriedFrom.map(c => c.source), ...(plan[i].primary !== null ? [plan[i].primary] : []), ...plan.flatMap((l, k) => (l.primary === i ? [k] : []))]) }
  const wrong = groups.filter(g => !g.members.some((m, i) => g.members.some((n, j) => i < j && [...family(m.tag)].some(x => family(n.tag).has(x)))))
  falseGroups += wrong.length
  if (wrong.length) { plantsWithFalse++; console.log(`plant ${p}: unrelated loops grouped: ${wrong.map(g => g.members.map(m => m.tag).join(' + ')).join('; ')}`) }
}
const share = (k: number, n: number) => `${k} of ${n} (${n ? Math.round(100 * k / n) : 0} %)`
console.log(`groups planted and audible found: ${share(found, planted)}`)
console.log(`source ranked first: ${share(first, found)}; among the first three: ${share(amongThree, found)}`)
console.log(`members of them found: ${share(membersFound, members)}`)
console.log(`groups of unrelated loops: ${share(falseGroups, groupsInAll)} of all groups; plants with one: ${share(plantsWithFalse, Number(values.plants))}`)
