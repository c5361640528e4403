import { shallowRef } from 'vue'

/** The one floating note of the page: where, and what it says. The first line is the title. */
export interface Tip { x: number, y: number, lines: string[] }
const tip = shallowRef<Tip | null>(null)

export function useTip() {
  return { tip, showTip: (next: Tip) => { tip.value = next }, hideTip: () => { tip.value = null } }
}
