import { defineStore } from 'pinia'
import { computed, ref, watch } from 'vue'

const KEY = 'fettle.theme'
export type ThemeChoice = 'system' | 'light' | 'dark'
const choices: readonly ThemeChoice[] = ['system', 'light', 'dark']

/** Light or dark: by the system or by choice; the choice stays on this device. */
export const useThemeStore = defineStore('theme', () => {
  const dark = window.matchMedia('(prefers-color-scheme: dark)')
  const systemIsDark = ref(dark.matches)
  dark.addEventListener('change', (event) => { systemIsDark.value = event.matches })
  const stored = localStorage.getItem(KEY) as ThemeChoice | null
  const choice = ref<ThemeChoice>(stored && choices.includes(stored) ? stored : 'system')
  const resolved = computed<'light' | 'dark'>(() => (choice.value === 'system' ? (systemIsDark.value ? 'dark' : 'light') : choice.value))
  watch(resolved, (theme) => { document.documentElement.dataset.theme = theme }, { immediate: true, flush: 'sync' })
  watch(choice, value => localStorage.setItem(KEY, value))
  return { choice, resolved }
})
