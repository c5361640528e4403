/** Sorting by several keys, as the URL writes it: `-weightedLostHours,tag`. */
export interface SortKey { key: string, descending: boolean }

export const parseSort = (text: string): SortKey[] =>
  text.split(',').map(s => s.trim()).filter(Boolean).map(s => ({ key: s.replace(/^-/, ''), descending: s.startsWith('-') }))

export const writeSort = (keys: readonly SortKey[]): string => keys.map(k => `${k.descending ? '-' : ''}${k.key}`).join(',')

/**
 * What a press on a header does: begin with that key (numbers from the largest), turn it, or take it out again.
 * `add` keeps the other keys (Shift).
 */
export function pressSort(keys: readonly SortKey[], key: string, { add, descendingFirst }: { add: boolean, descendingFirst: boolean }): SortKey[] {
  const now = keys.find(k => k.key === key)
  const next: SortKey | null = !now ? { key, descending: descendingFirst } : now.descending === descendingFirst ? { key, descending: !descendingFirst } : null
  if (!add) return keys.length > 1 ? [{ key, descending: descendingFirst }] : next ? [next] : []
  if (!now) return [...keys, next!]
  return next ? keys.map(k => (k.key === key ? next : k)) : keys.filter(k => k.key !== key)
}
