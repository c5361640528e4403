import { readFileSync } from 'node:fs'

const folder = new URL('../../../fixtures/reference/', import.meta.url)

/** Columns of a signal of fixtures/reference/signals. */
export function referenceSignal(name: string): Record<string, Float64Array> {
  const [head, ...rows] = readFileSync(new URL(`signals/${name}.csv`, folder), 'utf8').trim().split('\n').map(row => row.split(','))
  return Object.fromEntries(head!.map((column, i) => [column, Float64Array.from(rows, row => Number(row[i]))]))
}

/** Values of a reference case, read by name in the tests. */
type Reference = any

/** A case of fixtures/reference/<file>.json by the end of its id. */
export function referenceCase(file: 'oscillation' | 'stiction' | 'idle', id: string): { inputs: Reference, expected: Reference } {
  const { cases } = JSON.parse(readFileSync(new URL(`${file}.json`, folder), 'utf8'))
  const found = cases.find((c: { id: string }) => c.id.endsWith(`/${id}`))
  if (!found) throw new Error(`no reference case ${id} in ${file}.json`)
  return found
}
