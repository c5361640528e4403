import { computed, ref, shallowRef } from 'vue'
import type { TicketState, TicketView, TuningValues } from '#shared/types/tickets'
import { deviceStore } from '~/utils/deviceStore'

export type OutboxWork =
  | { kind: 'comment', text: string }
  | { kind: 'check', checkId: string, title: string, tag: string, values: TuningValues, replaces: string | null }
  | { kind: 'tuning', tag: string, stage: 'asFound' | 'asLeft', tuning: TuningValues, reason: string, changeNumber: string | null }
  | { kind: 'move', from: TicketState, to: Exclude<TicketState, 'closed'>, reason?: string }
  | { kind: 'file', name: string, file: Blob }

export interface Kept {
  /** place in the queue, given by the device's database */
  order: number
  key: string
  userId: number
  ticketId: number
  at: string
  work: OutboxWork
  /** what the server had against it; the item stays until somebody decides */
  refused: { code: string, message: string, data: Record<string, unknown> } | null
}

const items = shallowRef<Kept[]>([])
/** sent a moment ago: shown as answered until the ticket was read again, so that no form opens anew in between */
const recent = shallowRef<Kept[]>([])
const waiting = ref(false)
const sentCount = ref(0)
let loaded = false
let running: Promise<void> | null = null

/** No answer, or one that says "later": nothing to decide about, it is tried again. */
const isLater = (status: number) => status === 0 || status === 401 || status === 429 || status >= 500

async function reload(): Promise<void> { items.value = await deviceStore.all<Kept>() }

async function send({ ticketId, key, at, work }: Kept): Promise<void> {
  const url = `/api/tickets/${ticketId}`
  const options = { retry: 0, timeout: 60_000 }
  if (work.kind === 'file') {
    await $fetch(`${url}/files`, { ...options, method: 'POST', query: { name: work.name, at }, body: work.file, headers: { 'Idempotency-Key': key, 'Content-Type': 'application/octet-stream' } })
  }
  else if (work.kind === 'move') {
    // The version changes with every change; what matters to a move is the state that the person saw.
    const now = await $fetch<TicketView>(url, options)
    if (now.state === work.to) return
    if (now.state !== work.from) throw new ApiFailure(`The ticket is ${now.state} by now, so it could not be moved to ${work.to}.`, 409, 'changed_meanwhile')
    await $fetch(url, { ...options, method: 'PATCH', body: { version: now.version, state: work.to, reason: work.reason, at } })
  }
  else {
    const { kind, ...rest } = work
    const entry = kind === 'check' ? { kind, checkId: work.checkId, tag: work.tag, values: work.values, replaces: work.replaces } : { kind, ...rest }
    await $fetch(`${url}/entries`, { ...options, method: 'POST', body: { idempotencyKey: key, at, entry } })
  }
}

async function drain(userId: number): Promise<void> {
  await reload()
  for (const item of items.value) {
    if (item.userId !== userId || item.refused) continue
    try {
      await send(item)
      await deviceStore.remove(item.order)
      recent.value = [...recent.value, item]
      waiting.value = false
      sentCount.value++
    }
    catch (error) {
      const failure = toFailure(error)
      if (isLater(failure.status)) { waiting.value = true; break }
      await deviceStore.put({ ...item, refused: { code: failure.code, message: failure.message, data: failure.data } })
    }
    await reload()
  }
}

/**
 * What was written in the field: kept on the device first, then sent in the order in which it was written. An entry
 * leaves the device only when the server has it; what the server refuses stays, with the reason, until it is decided on.
 */
export function useOutbox() {
  const session = useSessionStore()

  function flush(): Promise<void> {
    const userId = session.person?.id
    if (userId === undefined) return Promise.resolve()
    // one sender for all open tabs where the browser can do that; the keys make a double harmless
    const work = () => drain(userId)
    return running ??= (navigator.locks ? navigator.locks.request('fettle-outbox', work) : work())
      .catch(() => { waiting.value = true }).finally(() => { running = null }) as Promise<void>
  }
  async function keep(ticketId: number, work: OutboxWork): Promise<void> {
    await deviceStore.add({ key: crypto.randomUUID?.() ?? `${Date.now()}-${performance.now()}`, userId: session.person!.id, ticketId, at: new Date().toISOString(), work, refused: null })
    await reload()
    // one that is under way may have read the list before this item
    await running
    await flush()
  }
  /** Sends a refused item again in another form, in its old place. */
  async function amend(item: Kept, work: OutboxWork): Promise<void> {
    await deviceStore.put({ ...item, work, key: crypto.randomUUID?.() ?? `${Date.now()}-${performance.now()}`, refused: null })
    await flush()
  }
  async function drop(item: Kept): Promise<void> {
    await deviceStore.remove(item.order)
    await reload()
  }
  if (!loaded) {
    loaded = true
    // a browser that keeps nothing says so when something is to be kept
    void reload().then(flush, () => {})
    window.addEventListener('online', () => { void flush() })
    document.addEventListener('visibilitychange', () => { if (document.visibilityState === 'visible') void flush() })
    setInterval(() => { if (items.value.some(i => !i.refused)) void flush() }, 15_000)
  }
  const own = computed(() => items.value.filter(i => i.userId === session.person?.id))
  const forget = (sent: readonly Kept[]) => { recent.value = recent.value.filter(i => !sent.includes(i)) }
  return { items: own, recent, forget, waiting, sentCount, keep, amend, drop, flush }
}
