import { describe, expect, it } from 'vitest'
import { demoOutages, demoPlant, simulateDemoLoop, simulateDemoLoopWithTruth } from '../../../db/seeds/demo/tarnHollow'
import { CASCADES, GROUP, STORIES } from '../../../db/seeds/demo/tarnHollowStories'

const MONDAY = Date.UTC(2026, 10, 9)
const weeks = { startMs: MONDAY, weeks: 3, zone: 'UTC' }
const plant = demoPlant()
const indexOf = (tag: string) => plant.findIndex(l => l.setup.tag === tag)
const errorByWeek = (tag: string) => {
  const { t, pv, sp } = simulateDemoLoop(indexOf(tag), weeks)
  const sum = [0, 0, 0]
  const n = [0, 0, 0]
  t.forEach((ms, i) => { const w = Math.floor((ms - MONDAY) / (7 * 86_400_000)); if (pv[i] === pv[i]) { sum[w] += Math.abs(sp![i] - pv[i]); n[w]++ } })
  return sum.map((s, w) => s / n[w] / plant[indexOf(tag)].setup.tolerance)
}

describe('the demo plant (invented)', () => {
  it('about 240 loops in 8 areas, tags of ISA-5.1 letters, unique; two thirds healthy; every story finds its loop', () => {
    expect(plant.length).toBeGreaterThan(220)
    expect(new Set(plant.map(l => l.area)).size).toBe(8)
    expect(new Set(plant.map(l => l.setup.tag)).size).toBe(plant.length)
    for (const { setup } of plant) expect(setup.tag).toMatch(/^(TIC|FIC|PIC|LIC|AIC|PDIC)-\d+$/)
    const healthy = plant.filter(l => l.cause === 'healthy').length / plant.length
    expect(healthy).toBeGreaterThan(0.62)
    expect(healthy).toBeLessThan(0.73)
    for (const [tag, { cause }] of Object.entries(STORIES)) expect([tag, plant[indexOf(tag)].cause]).toEqual([tag, cause])
    for (const tag of Object.keys(GROUP.members)) expect(plant[indexOf(tag)].setup.upstream).toEqual([GROUP.source])
    for (const tag of Object.values(CASCADES)) expect(plant[indexOf(tag)].setup.normalModes).toEqual(['CAS'])
  })

  it('tells its story: a valve repaired in week 2, a loop worse in week 3', () => {
    const repaired = errorByWeek('PIC-337')
    expect(repaired[2]).toBeLessThan(0.5 * repaired[0])
    const worse = errorByWeek('TIC-1208')
    expect(worse[2]).toBeGreaterThan(1.7 * worse[0])
    const retuned = errorByWeek('TIC-843')
    expect(retuned[2]).toBeLessThan(0.6 * retuned[0])
  })

  it('each loop by itself, in any order; the outage stops its area', () => {
    const press = indexOf('TIC-523')
    const first = simulateDemoLoopWithTruth(press, { ...weeks, weeks: 2 })
    simulateDemoLoop(indexOf('PIC-331'), weeks)
    expect(simulateDemoLoop(press, { ...weeks, weeks: 2 }).pv).toEqual(first.record.pv)
    const [{ fromMs, toMs }] = demoOutages(weeks)
    const inside = [...first.record.op!].filter((_, i) => first.record.t[i] >= fromMs && first.record.t[i] < toMs)
    expect(inside.length).toBeGreaterThan(100)
    expect(inside.every(u => u === 0)).toBe(true)
  })

  it('follows the clocks of the zone: a week in which they change has an hour more', () => {
    const monday = Date.UTC(2026, 9, 18, 23) // Monday 19 October 2026, 00:00 in London, clocks back on the 25th
    const { t } = simulateDemoLoop(indexOf('TIC-523'), { startMs: monday, weeks: 1, zone: 'Europe/London' })
    expect(t.length).toBe(169 * 180)
  })
})
