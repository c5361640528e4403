import { ref } from 'vue'
import { counted } from '#shared/format/words'

/** Changes many loops one after the other and says how far it is; what fails does not stop the rest. */
export function useBulkChange() {
  const api = useApi()
  const { done, failed } = useToasts()
  const busy = ref(false)
  const progress = ref('')
  async function change(tags: readonly string[], what: Record<string, unknown>): Promise<void> {
    busy.value = true
    const refused: string[] = []
    let reason = ''
    for (const [i, tag] of tags.entries()) {
      progress.value = `${i + 1} of ${tags.length}`
      try { await api.patch(`/api/loops/${encodeURIComponent(tag)}`, what) }
      catch (error) { refused.push(tag); reason ||= toFailure(error).message }
    }
    busy.value = false
    if (refused.length < tags.length) done(`${counted(tags.length - refused.length, 'loop')} changed.`)
    if (refused.length) failed(`${counted(refused.length, 'loop')} not changed (${refused.slice(0, 3).join(', ')}${refused.length > 3 ? ', …' : ''}): ${reason}`)
  }
  return { busy, progress, change }
}
