import { writeFileSync } from 'node:fs'

export interface Line { name: string, ratio: number, what: string, gate: string, met: boolean | null, details: Record<string, unknown> }
const lines: Line[] = []

export const median = (x: number[]): number => {
  const s = [...x].sort((a, b) => a - b)
  return s.length % 2 ? s[s.length >> 1] : (s[s.length / 2 - 1] + s[s.length / 2]) / 2
}

/** Runs two things in turn, so that a slow minute of the machine hits both, and answers the medians of their times (ms). */
export async function alternate(times: number, first: () => Promise<number | void> | number | void, second: () => Promise<number | void> | number | void): Promise<[number, number, number[], number[]]> {
  const a: number[] = []
  const b: number[] = []
  for (let i = 0; i < times; i++) {
    a.push(await timed(first))
    b.push(await timed(second))
  }
  return [median(a), median(b), a, b]
}

/** Milliseconds of a run; a run that answers a number measured itself. */
export async function timed(work: () => Promise<number | void> | number | void): Promise<number> {
  const started = performance.now()
  const own = await work()
  return own ?? performance.now() - started
}

/** One line of the result. `gate`: at least (or at most, `under`) what the design asks for; null where there is none. */
export function report(name: string, ratio: number, what: string, gate: { least?: number, under?: number } = {}, details: Record<string, unknown> = {}): void {
  const met = gate.least !== undefined ? ratio >= gate.least : gate.under !== undefined ? ratio <= gate.under : null
  const asked = gate.least !== undefined ? `at least ${gate.least}` : gate.under !== undefined ? `at most ${gate.under}` : ''
  lines.push({ name, ratio, what, gate: asked, met, details })
  console.log(`${name}: ${ratio.toPrecision(3)} x (${what})${met === false ? `   GATE MISSED: ${asked}` : ''}`)
}

export function save(path: string, about: Record<string, unknown>): void {
  writeFileSync(path, JSON.stringify({ ...about, lines }, null, 2) + '\n')
}
