import { readFileSync } from 'node:fs'

const folder = new URL('../../../fixtures/reference/', import.meta.url)

export const referenceFile = (name: string): any => JSON.parse(readFileSync(new URL(`${name}.json`, folder), 'utf8'))

/** The cases of a reference file by what stands behind the section's name in their id. */
export const referenceCases = (name: string): Map<string, any> =>
  new Map(referenceFile(name).cases.map((c: { id: string }) => [c.id.slice(c.id.indexOf('/') + 1), c]))

/** First column of a signal, by its path below fixtures/reference. */
export function signal(path: string): Float64Array {
  const lines = readFileSync(new URL(path, folder), 'utf8').trim().split('\n').slice(1)
  return Float64Array.from(lines, line => Number(line.split(',')[0]))
}

export const largestDifference = (a: ArrayLike<number>, b: ArrayLike<number>): number => {
  if (a.length !== b.length) return Infinity
  let largest = 0
  for (let i = 0; i < a.length; i++) {
    const d = Math.abs(a[i] - b[i])
    if (!(d <= largest)) largest = Number.isNaN(d) ? Infinity : d
  }
  return largest
}
