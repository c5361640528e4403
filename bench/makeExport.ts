import { createWriteStream } from 'node:fs'
import { once } from 'node:events'
import { seededRandom } from '../shared/assessment/statistics/seededRandom'

export interface ExportShape { path: string, loops: number, days: number, intervalS: number, layout: 'wide' | 'long', seed: number, start?: number }

/**
 * Writes an export as a historian would: each loop a set point with a few steps, a PV that follows it with an oscillation
 * or noise, an OP, and a mode. Quick to make, for measuring speed; causes worth diagnosing are the simulator's business.
 */
export async function makeExport({ path, loops, days, intervalS, layout, seed, start = Date.UTC(2026, 10, 23) }: ExportShape): Promise<void> {
  const out = createWriteStream(path, { highWaterMark: 1 << 22 })
  const rows = Math.round(days * 86_400 / intervalS)
  const table = noiseTable(seed)
  const tags = Array.from({ length: loops }, (_, k) => `${['TIC', 'FIC', 'PIC', 'LIC', 'AIC'][k % 5]}-${1000 + k}`)
  out.write(layout === 'wide' ? `timestamp,${tags.flatMap(tag => ['PV', 'SP', 'OP', 'MODE'].map(s => `${tag}.${s}`)).join(',')}\n` : 'timestamp,tag,value,quality\n')
  const slow = new Float64Array(loops)
  let text: string[] = []
  let length = 0
  for (let i = 0; i < rows; i++) {
    const time = new Date(start + i * intervalS * 1000).toISOString().slice(0, 19) + 'Z'
    const cells: string[] = layout === 'wide' ? [time] : []
    for (let k = 0; k < loops; k++) {
      const at = i * intervalS
      const noise = table[(i * 7919 + k * 104_729) & 65_535]
      slow[k] = 0.98 * slow[k] + 0.2 * noise
      const swing = k % 3 === 0 ? 2 * Math.sin(at / (40 + (k % 17) * 15)) : 0
      const sp = 50 + (k % 9) * 5 + 3 * (Math.floor(at / 40_000 + k) % 2)
      const pv = (sp + swing + slow[k]).toFixed(2)
      const op = Math.min(100, Math.max(0, 45 - swing * 1.5 - slow[k] * 2)).toFixed(1)
      const mode = (at + k * 5000) % 200_000 < 6000 ? 'MAN' : 'AUTO'
      if (layout === 'wide') cells.push(pv, sp.toFixed(1), op, mode)
      else for (const [s, v] of [['PV', pv], ['SP', sp.toFixed(1)], ['OP', op], ['MODE', mode]]) text.push(`${time},${tags[k]}.${s},${v},Good\n`)
    }
    if (layout === 'wide') text.push(`${cells.join(',')}\n`)
    if (++length * loops > 20_000) {
      if (!out.write(text.join(''))) await once(out, 'drain')
      text = []
      length = 0
    }
  }
  out.end(text.join(''))
  await once(out, 'finish')
}

function noiseTable(seed: number): Float64Array {
  const random = seededRandom(seed)
  return Float64Array.from({ length: 65_536 }, () => random.normal())
}
