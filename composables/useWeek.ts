import { computed } from 'vue'

/** The week of the page: from the URL, else the one chosen last, else the newest; and how to change it. */
export function useWeek() {
  const route = useRoute()
  const router = useRouter()
  const store = useWeekStore()
  const inUrl = computed(() => (typeof route.query.week === 'string' && /^\d{4}-W\d{2}$/.test(route.query.week) ? route.query.week : null))
  const week = computed(() => inUrl.value ?? store.chosen ?? store.latest)
  function setWeek(next: string): void {
    store.chosen = next === store.latest ? null : next
    void router.replace({ query: { ...route.query, week: next } })
  }
  return { week, inUrl, setWeek }
}
