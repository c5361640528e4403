import { defineStore } from 'pinia'
import { ref } from 'vue'
import type { Person } from '#shared/types/people'

export interface SiteFacts { siteName: string, zone: string, demo: boolean }

/** Who is signed in. The server decides on every call; this only saves asking again on every page. */
export const useSessionStore = defineStore('session', () => {
  const person = ref<Person | null>(null)
  const site = ref<SiteFacts | null>(null)
  const loaded = ref(false)

  /** Asks the server once; nobody signed in is an answer, not a failure. */
  async function load(again = false): Promise<void> {
    if (loaded.value && !again) return
    try {
      const answer = await $fetch<{ person: Person, site: SiteFacts }>('/api/auth/me', { retry: 0 })
      person.value = answer.person
      site.value = answer.site
    }
    catch (error) {
      const failure = toFailure(error)
      if (failure.status !== 401) throw failure
      person.value = null
    }
    loaded.value = true
  }

  async function signIn(email: string, password: string): Promise<void> {
    await useApi().post('/api/auth/sign-in', { email, password })
    await load(true)
  }

  /** What the pages have gathered belongs to the person who leaves: a full load of the sign-in page drops it. */
  async function signOut(): Promise<void> {
    await useApi().post('/api/auth/sign-out')
    window.location.assign('/sign-in')
  }
  return { person, site, loaded, load, signIn, signOut }
})
