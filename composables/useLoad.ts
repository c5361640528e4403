import { onScopeDispose, ref, shallowRef, watch, type WatchSource } from 'vue'

/**
 * Loads and loads again whenever `sources` change. The last answer stays on screen while the next one is under way,
 * and an answer that was overtaken by a newer question is dropped.
 * @param load gets a signal that is aborted when the answer is no longer wanted
 */
export function useLoad<T>(load: (signal: AbortSignal) => Promise<T>, sources: WatchSource<unknown>[] = []) {
  const data = shallowRef<T | null>(null)
  const failure = shallowRef<ApiFailure | null>(null)
  const pending = ref(false)
  let current: AbortController | undefined

  async function reload(): Promise<void> {
    current?.abort()
    const mine = current = new AbortController()
    pending.value = true
    try {
      const answer = await load(mine.signal)
      if (mine.signal.aborted) return
      data.value = answer
      failure.value = null
    }
    catch (error) {
      if (!mine.signal.aborted) failure.value = toFailure(error)
    }
    finally {
      if (current === mine) pending.value = false
    }
  }
  watch(sources, () => { void reload() }, { immediate: true })
  onScopeDispose(() => current?.abort())
  return { data, failure, pending, reload }
}
