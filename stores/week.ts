import { defineStore } from 'pinia'
import { computed, ref } from 'vue'
import type { WeekItem, WeeksAnswer } from '#shared/types/fleet'

/** The chosen week, which outlives a page, and the weeks there are. The URL (`?week=`) goes before it; see useWeek. */
export const useWeekStore = defineStore('week', () => {
  const site = ref('')
  const zone = ref('UTC')
  const weeks = ref<WeekItem[]>([])
  const chosen = ref<string | null>(null)
  const loaded = ref(false)
  const latest = computed(() => weeks.value[0]?.week ?? null)

  async function load(): Promise<void> {
    const answer = await useApi().get<WeeksAnswer>('/api/weeks')
    site.value = answer.site
    zone.value = answer.zone
    weeks.value = answer.weeks
    loaded.value = true
  }
  return { site, zone, weeks, chosen, latest, loaded, load }
})
