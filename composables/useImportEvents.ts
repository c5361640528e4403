import { onScopeDispose, shallowRef, watch } from 'vue'
import type { ImportItem } from '#shared/types/imports'

/** One import as it goes on, by server-sent events; the browser connects again by itself after a break. */
export function useImportEvents(id: () => number | null) {
  const item = shallowRef<ImportItem | null>(null)
  let source: EventSource | undefined
  const stop = () => { source?.close(); source = undefined }
  function follow(): void {
    stop()
    const wanted = id()
    if (wanted === null) return
    source = new EventSource(`/api/imports/${wanted}/events`)
    source.onmessage = (event) => {
      item.value = JSON.parse(event.data) as ImportItem
      if (item.value.status === 'done' || item.value.status === 'failed') stop()
    }
  }
  watch(id, follow, { immediate: true })
  onScopeDispose(stop)
  return { item, follow }
}
