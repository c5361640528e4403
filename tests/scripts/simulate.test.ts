import { mkdtempSync, readdirSync, readFileSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { gunzipSync } from 'node:zlib'
import { parse } from 'csv-parse/sync'
import { afterAll, describe, expect, it } from 'vitest'
import { planPlant } from '../../shared/assessment/simulation/planPlant'
import { simulatePlantLoop } from '../../shared/assessment/simulation/simulatePlant'
import { readOptions, simulateExport } from '../../scripts/simulate'

const folder = mkdtempSync(join(tmpdir(), 'fettle-simulate-'))
afterAll(() => rmSync(folder, { recursive: true, force: true }))
const options = (out: string, more: string[] = []) => readOptions(['--loops', '12', '--days', '1', '--interval', '20', '--seed', '5', '--mix', 'balanced', '--out', join(folder, out), ...more])
const plan = planPlant({ loops: 12, days: 1, intervalS: 20, seed: 5, startMs: Date.UTC(2026, 10, 23), mix: 'balanced' })
const MODES = ['AUTO', 'MAN', 'CAS']

describe('npm run simulate (read back by csv-parse)', () => {
  it('wide: every value, mode and time of every loop comes back', async () => {
    const { rows, files } = await simulateExport(options('week.csv'))
    expect(rows).toBe(4320)
    expect(readdirSync(folder).sort()).toEqual(['week.csv', 'week.loops.csv', 'week.truth.json'])
    const table = parse(readFileSync(files[0], 'utf8'), { columns: true }) as Record<string, string>[]
    expect(table).toHaveLength(4320)
    expect(table[1].timestamp).toBe('2026-11-23T00:00:20Z')
    for (let loop = 0; loop < plan.length; loop++) {
      const { record } = simulatePlantLoop(plan, loop)
      const { tag } = plan[loop].setup
      const same = (text: string, value: number) => Number.isNaN(value) ? text === '' : Number(text) === value
      table.forEach((row, i) => {
        if (!same(row[`${tag}.PV`], record.pv[i]) || !same(row[`${tag}.SP`], record.sp![i]) || !same(row[`${tag}.OP`], record.op![i]) || row[`${tag}.MODE`] !== MODES[record.mode![i]])
          expect([tag, i, row[`${tag}.PV`], row[`${tag}.SP`], row[`${tag}.OP`]]).toEqual([tag, i, String(record.pv[i]), String(record.sp![i]), String(record.op![i])])
      })
    }
  })

  it('truth and loop list hold every loop; the list has the columns of the import', () => {
    const truth = JSON.parse(readFileSync(join(folder, 'week.truth.json'), 'utf8')) as { loops: { tag: string, cause: string, spans: unknown[] }[] }
    expect(truth.loops.map(l => [l.tag, l.cause])).toEqual(plan.map(l => [l.setup.tag, l.scenario.truth.cause]))
    const list = parse(readFileSync(join(folder, 'week.loops.csv'), 'utf8'), { columns: true }) as Record<string, string>[]
    expect(Object.keys(list[0])).toEqual(['tag', 'description', 'area', 'unit', 'type', 'pvLow', 'pvHigh', 'pvUnit', 'opLow', 'opHigh', 'normalModes', 'tolerance', 'priority', 'deadTime', 'interval', 'form', 'action', 'gain', 'integralTime', 'derivativeTime', 'filterTime', 'setpointWeight', 'hysteresis', 'upstream', 'gainUnit', 'timeUnit'])
    list.forEach((row, i) => expect([row.tag, Number(row.pvHigh), Number(row.gain)]).toEqual([plan[i].setup.tag, plan[i].setup.pvHigh, plan[i].setup.gain]))
  })

  it('long and compressed, from Monday 00:00 of the zone', async () => {
    const { files } = await simulateExport(options('long.csv.gz', ['--layout', 'long', '--zone', 'America/New_York', '--days', '0.05']))
    expect(readdirSync(folder)).toContain('long.truth.json')
    const table = parse(gunzipSync(readFileSync(files[0])), { columns: true }) as Record<string, string>[]
    expect(table).toHaveLength(216 * 12 * 4)
    expect(table[0].timestamp).toBe('2026-11-23T05:00:00Z')
    expect(table[0].tag).toMatch(/\.PV$/)
    expect(table.filter(r => r.tag.endsWith('.MODE')).every(r => MODES.includes(r.value))).toBe(true)
  })

  it('a wrong option stops with a sentence', () => {
    expect(() => readOptions(['--loops', '0'])).toThrow('--loops must be a whole number from 1 to 100000, got "0".')
    expect(() => readOptions(['--layout', 'tall'])).toThrow('--layout must be wide or long, got "tall".')
  })
})
