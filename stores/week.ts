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

  let loadedAt = 0

  /** Asks again when the last answer is older than `olderThanMs`: an import may have brought a week. */
  async function load(olderThanMs = 0): Promise<void> {
    if (loaded.value && Date.now() - loadedAt < olderThanMs) return
    loadedAt = Date.now()
    try {
      const answer = await useApi().get<WeeksAnswer>('/api/weeks')
      site.value = answer.site
      zone.value = answer.zone
      weeks.value = answer.weeks
    }
    // without the list the pages still ask for the newest week, and say themselves what is wrong
    finally { loaded.value = true }
  }
  return { site, zone, weeks, chosen, latest, loaded, load }
})
