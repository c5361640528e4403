import { computed } from 'vue'
import { parseSort, writeSort, type SortKey } from '#shared/format/sortKeys'

export const FILTER_KEYS = ['area', 'type', 'state', 'verdict', 'priority', 'group', 'lostOver', 'ticket', 'setAside', 'search'] as const
export type FilterKey = typeof FILTER_KEYS[number]

/** Filters and sorting of the fleet, kept in the URL and nowhere else: a link shows what its sender saw. */
export function useFleetQuery() {
  const route = useRoute()
  const router = useRouter()
  const list = (key: string): string[] => {
    const value = route.query[key]
    const all = (Array.isArray(value) ? value : [value]).filter((v): v is string => typeof v === 'string' && v !== '')
    return key === 'area' ? all : all.flatMap(v => v.split(','))
  }
  const text = (key: string): string => list(key).join(',')
  const sort = computed<SortKey[]>(() => parseSort(text('sort')))
  const filters = computed(() => Object.fromEntries(FILTER_KEYS.map(key => [key, list(key)])) as Record<FilterKey, string[]>)
  const filtered = computed(() => FILTER_KEYS.some(key => filters.value[key].length > 0))

  function set(changes: Record<string, string | string[] | undefined>): void {
    const query: Record<string, string | string[]> = {}
    for (const [key, value] of Object.entries({ ...route.query, ...changes })) {
      if (Array.isArray(value)) { if (value.length) query[key] = value as string[] }
      else if (value) query[key] = value
    }
    void router.replace({ query })
  }
  const write = (key: FilterKey, values: string[]) => set({ [key]: key === 'area' ? values : values.join(',') })
  return {
    sort, filters, filtered, set,
    setSort: (keys: SortKey[]) => set({ sort: writeSort(keys) }),
    setFilter: write,
    toggle: (key: FilterKey, value: string) => write(key, filters.value[key].includes(value) ? filters.value[key].filter(v => v !== value) : [...filters.value[key], value]),
    clear: () => set(Object.fromEntries(FILTER_KEYS.map(key => [key, undefined]))),
    /** what the API gets: filters and sort, without the week */
    query: computed(() => {
      const q: Record<string, string | string[]> = {}
      for (const key of FILTER_KEYS) if (filters.value[key].length) q[key] = key === 'area' ? filters.value[key] : filters.value[key].join(',')
      if (sort.value.length) q.sort = writeSort(sort.value)
      return q
    }),
  }
}
