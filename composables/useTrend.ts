import { computed, ref, shallowRef, watch } from 'vue'

export interface TrendData { t: number[], pv: (number | null)[], sp: (number | null)[], op: (number | null)[], mode: (string | null)[] }
type TrendAnswer = Omit<TrendData, 't'> & { t: string[] }

/** Samples of a loop in a window, thinned with the peaks kept; times as epoch ms. */
export async function fetchTrend(tag: string, w: TrendWindow, points: number, signal?: AbortSignal): Promise<TrendData> {
  const answer = await useApi().get<TrendAnswer>(`/api/loops/${encodeURIComponent(tag)}/trend`, { from: new Date(w.from).toISOString(), to: new Date(w.to).toISOString(), points }, signal)
  return { ...answer, t: answer.t.map(at => Date.parse(at)) }
}

export interface TrendWindow { from: number, to: number }

/** A loop's trend for a window that can be narrowed and taken back; finer data are fetched for each window. */
export function useTrend(tag: () => string, whole: () => TrendWindow | null) {
  const stack = ref<TrendWindow[]>([])
  const window_ = computed(() => stack.value[stack.value.length - 1] ?? whole())
  const { data, failure, pending, reload } = useLoad<TrendData | null>(async (signal) => {
    const w = window_.value
    if (!w) return null
    return fetchTrend(tag(), w, 1500, signal)
  }, [tag, window_])
  watch([tag, () => whole()?.from], () => { stack.value = [] })
  const shown = shallowRef<TrendWindow | null>(null)
  watch(data, () => { shown.value = window_.value })
  return {
    data, failure, pending, reload, window: window_, shown,
    zoomed: computed(() => stack.value.length > 0),
    zoom: (next: TrendWindow) => { if (next.to - next.from >= 2000) stack.value = [...stack.value, next] },
    back: () => { stack.value = stack.value.slice(0, -1) },
    reset: () => { stack.value = [] },
  }
}
