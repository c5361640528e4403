import { defineStore } from 'pinia'
import { ref, watch } from 'vue'

const KEY = 'fettle.loops.columns'

function stored(): string[] | null {
  try {
    const value: unknown = JSON.parse(localStorage.getItem(KEY) ?? 'null')
    return Array.isArray(value) && value.every(v => typeof v === 'string') ? value : null
  }
  catch { return null }
}

/** Columns of the fleet table, as chosen on this device; null: the usual ones. */
export const useColumnsStore = defineStore('columns', () => {
  const chosen = ref<string[] | null>(stored())
  watch(chosen, value => (value ? localStorage.setItem(KEY, JSON.stringify(value)) : localStorage.removeItem(KEY)))
  return { chosen }
})
