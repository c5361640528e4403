import { ref, shallowRef, watch } from 'vue'
import { weeksBetween } from '#shared/assessment/week/isoWeek'
import type { LoopProof, TicketProof, TicketView } from '#shared/types/tickets'
import { fetchTrend, type TrendData } from './useTrend'

export interface ProofSeries { before: TrendData | null, after: TrendData | null, ribbons: { week: string, ribbon: string, when: 'before' | 'after' }[] }
const MOST_DRAWN = 6

/** The proof of a ticket for the chosen windows, with the trends and ribbons to check it by. */
export function useProof(ticket: () => TicketView | null, zone: () => string) {
  const api = useApi()
  const windows = ref<Record<string, string>>({})
  const series = shallowRef<ReadonlyMap<string, ProofSeries>>(new Map())
  const wanted = () => { const t = ticket(); return t && ['toVerify', 'closed'].includes(t.state) ? `${t.id} ${t.version} ${t.state}` : null }
  const { data, failure, pending, reload } = useLoad<TicketProof | null>(async (signal) => {
    const t = ticket()
    if (!t || !wanted()) return null
    return t.state === 'closed' ? t.proof : api.get<TicketProof>(`/api/tickets/${t.id}/proof`, windows.value, signal)
  }, [wanted, windows])

  async function seriesOf(p: LoopProof): Promise<ProofSeries> {
    const url = `/api/loops/${encodeURIComponent(p.tag)}`
    const trend = (w: LoopProof['before']) => w.toMs > w.fromMs ? fetchTrend(p.tag, { from: w.fromMs, to: w.toMs }, 1200).catch(() => null) : null
    const weeks = async (w: LoopProof['before'], when: 'before' | 'after') => await Promise.all(weeksBetween(w.fromMs, w.toMs, zone()).slice(0, 3).map(async (week) => {
      const loop = await api.get<{ ribbon: string | null }>(url, { week }).catch(() => null)
      return { week, when, ribbon: loop?.ribbon ?? '' }
    }))
    const [before, after, first, second] = await Promise.all([trend(p.before), trend(p.after), weeks(p.before, 'before'), weeks(p.after, 'after')])
    return { before, after, ribbons: [...first, ...second].filter(r => r.ribbon) }
  }
  watch(data, async (proof) => {
    const next = new Map<string, ProofSeries>()
    // one after the other: a group of many loops should not ask for everything at once
    for (const p of (proof?.loops ?? []).slice(0, MOST_DRAWN)) {
      next.set(p.tag, await seriesOf(p))
      if (data.value !== proof) return
      series.value = new Map(next)
    }
  })
  return { proof: data, failure, pending, reload, windows, series }
}
