import { onScopeDispose, ref, watch } from 'vue'
import type { TicketView } from '#shared/types/tickets'

/** A ticket, from the server or, without connection, as this device saw it last; read again when something was sent. */
export function useTicket(id: () => number) {
  /** when the shown copy was seen, while there is no connection */
  const seenAt = ref<string | null>(null)
  const router = useRouter()
  const outbox = useOutbox()
  const load = useLoad<TicketView>(async (signal) => {
    try {
      const answer = await $fetch.raw<TicketView>(`/api/tickets/${id()}`, { signal, retry: 0 })
      seenAt.value = answer.headers.get('x-fettle-offline')
      return answer._data as TicketView
    }
    catch (error) {
      const failure = toFailure(error)
      if (failure.status === 401 && !signal.aborted) await router.push({ path: '/sign-in', query: { next: router.currentRoute.value.fullPath } })
      throw signal.aborted ? error : failure
    }
  }, [id])
  watch(outbox.sentCount, async () => {
    const sent = outbox.recent.value
    await load.reload()
    // one that was overtaken by a newer reading leaves it to that
    if (!load.pending.value) outbox.forget(sent)
  })
  const back = () => { void outbox.flush(); void load.reload() }
  window.addEventListener('online', back)
  onScopeDispose(() => window.removeEventListener('online', back))
  return { ...load, seenAt, outbox }
}
