import type { Database } from '../../../db/knex'
import { listLoops, type LoopRow } from '../../../db/repositories/loops'
import { listRibbons, readDataMark } from '../../../db/repositories/ticketEvidence'
import { findTicket, listTicketEvents, type TicketRow } from '../../../db/repositories/tickets'
import { listBlocks } from '../../../db/repositories/trendBlocks'
import { medianInterval } from '../../../shared/assessment/preparation/medianInterval'
import { prepareRecord } from '../../../shared/assessment/preparation/prepareRecord'
import { compareWindows } from '../../../shared/assessment/proof/compareWindows'
import { proofRecord, type LedgerHour } from '../../../shared/assessment/proof/proofRecord'
import type { LoopSetup } from '../../../shared/assessment/types'
import { weekFrame } from '../../../shared/assessment/week/isoWeek'
import { joinProofs } from '../../../shared/tickets/joinProofs'
import type { LoopProof, ProofWindow, TicketProof } from '../../../shared/types/tickets'
import { loopRecord } from '../assessments/loopRecord'
import { loopSetup } from '../loops/loopSetup'
import { Refusal } from '../refusal'
import { getSettings, type SiteSettings } from '../settings'
import { noSuchTicket } from './refusals'

const HOUR_MS = 3_600_000
const WEEK_MS = 168 * HOUR_MS
const BIN_S = 600
const METHOD = 'Mean absolute error and error variance in bins of ten minutes in normal mode, and hours of the ledger; 95 % intervals from 999 replicates of the stationary bootstrap of both windows.'
const SOURCE = 'Politis, Romano (1994), The stationary bootstrap; Politis, White (2004), Automatic block-length selection for the dependent bootstrap. The decision and the limits of comparability are our own.'

export interface ProofQuery { beforeFrom?: string, beforeTo?: string, afterFrom?: string, afterTo?: string }

const cache = new Map<string, TicketProof>()
const CACHED = 200

/**
 * Before against after for each loop of a ticket, from the samples. Chosen by the program: the 7 days before the work
 * began (the ticket's own week where these hold no data) against at most 7 days from the moment the work was done. With
 * one more comparable week on record the after window grows to hold it and the proof is no longer provisional: one
 * decision at a moment fixed beforehand, not the better of two looks.
 *
 * Decoding takes about a tenth of a second a loop, which the web process may do; answers are kept until the ticket or
 * the data change.
 */
export async function proveTicket(db: Database, id: number, query: ProofQuery = {}): Promise<TicketProof> {
  const ticket = await findTicket(db, id)
  if (!ticket) throw noSuchTicket()
  const key = JSON.stringify([id, ticket.version, query, await readDataMark(db, ticket.loops.map(l => l.id))])
  const known = cache.get(key)
  if (known) return known
  const proof = await prove(db, ticket, query)
  cache.set(key, proof)
  if (cache.size > CACHED) cache.delete(cache.keys().next().value!)
  return proof
}

async function prove(db: Database, ticket: TicketRow, query: ProofQuery): Promise<TicketProof> {
  const settings = await getSettings(db)
  const workDoneMs = ticket.workDoneAt?.getTime() ?? null
  const began = (await listTicketEvents(db, ticket.id)).find(e => (e.data.state as { to?: string } | undefined)?.to === 'inWork')?.at.getTime() ?? null
  const workBeganMs = began === null ? workDoneMs : Math.min(began, workDoneMs ?? Infinity)
  const loops = await listLoops(db, ticket.loops.map(l => l.id))
  const proofs: LoopProof[] = []
  for (const [position, { id }] of ticket.loops.entries()) {
    const loop = loops.find(l => l.id === id)
    // the memory of one loop's samples is used again for the next, so one after the other
    if (loop) proofs.push(await proveLoop(db, loop, { ticket, query, settings, workBeganMs, workDoneMs, seed: ticket.id * 1000 + position }))
  }
  const iso = (ms: number | null) => ms === null ? null : new Date(ms).toISOString()
  return { ...joinProofs(proofs), loops: proofs, chosenByHand: Object.values(query).some(Boolean), workBeganAt: iso(workBeganMs), workDoneAt: iso(workDoneMs) }
}

interface Around { ticket: TicketRow, query: ProofQuery, settings: SiteSettings, workBeganMs: number | null, workDoneMs: number | null, seed: number }

async function proveLoop(db: Database, loop: LoopRow, { ticket, query, settings, workBeganMs, workDoneMs, seed }: Around): Promise<LoopProof> {
  const windows = proofWindows(db, loop, settings)
  const edges = weekFrame(ticket.week, settings.zone).hourEdges
  const ownWeek: ProofWindow = { fromMs: edges[0]!, toMs: edges[edges.length - 1]! }
  const sevenBefore = workBeganMs === null ? null : { fromMs: workBeganMs - WEEK_MS, toMs: workBeganMs }
  const useSeven = sevenBefore !== null && await windows.hasData(sevenBefore)
  const before = given(query.beforeFrom, query.beforeTo, useSeven ? sevenBefore! : ownWeek, 'before')
  const base = { tag: loop.tag, provisional: true, before, iaeRatio: null, varianceRatio: null, lostHoursWonPerWeek: null, checks: [], method: METHOD, source: SOURCE, samplesBefore: 0, samplesAfter: 0, blockLength: null, seed, verdict: 'cannotTell' as const }
  if (workDoneMs === null && !query.afterFrom) return { ...base, after: { fromMs: before.toMs, toMs: before.toMs }, reason: 'The work is not handed back yet, so there is no time after it to compare with.' }
  const wanted = given(query.afterFrom, query.afterTo, { fromMs: workDoneMs ?? before.toMs, toMs: (workDoneMs ?? before.toMs) + WEEK_MS }, 'after')
  const end = await windows.endOfData(wanted)
  if (end === null) return { ...base, after: wanted, reason: 'There are no data yet from the time after the work.' }
  const after: ProofWindow = { fromMs: wanted.fromMs, toMs: query.afterTo ? wanted.toMs : Math.min(wanted.toMs, end) }

  const compare = async (b: ProofWindow, a: ProofWindow) => await windows.compare(b, a, seed)
  if (!query.afterTo) {
    const next: ProofWindow = { fromMs: wanted.toMs, toMs: wanted.toMs + WEEK_MS }
    const nextEnd = await windows.endOfData(next)
    // data come in calendar weeks and work ends on any day: three days of the further week will do
    if (nextEnd !== null && nextEnd - next.fromMs >= 72 * HOUR_MS) {
      const further = await compare(before, next)
      // comparable: whatever it says, it is looked at together with the first week, once
      if (further.checks.every(c => c.ok || c.name === 'time before')) {
        const both = { fromMs: after.fromMs, toMs: nextEnd }
        return { ...base, ...await compare(before, both), after: both, provisional: false }
      }
    }
  }
  return { ...base, ...await compare(before, after), after }
}

/** Samples and ledger of a loop by window. Exported for the watch after closing, which compares other windows. */
export function proofWindows(db: Database, loop: LoopRow, settings: SiteSettings) {
  const setup: LoopSetup = loopSetup(loop, settings)
  let ledger: LedgerHour[] | null = null
  const hours = async (): Promise<LedgerHour[]> => ledger ??= (await listRibbons(db, loop.id)).flatMap(({ week, ribbon }) => {
    const { hourEdges } = weekFrame(week, settings.zone)
    return Array.from(ribbon, (letter, k) => ({ fromMs: hourEdges[k]!, letter })).filter(h => h.fromMs !== undefined)
  })
  const read = async (w: ProofWindow) => loopRecord(await listBlocks(db, [loop.id], w.fromMs, w.toMs), w.fromMs, w.toMs, setup.normalModes)
  const prepared = async (w: ProofWindow) => prepareRecord(await read(w), setup, { id: '', hourEdges: Float64Array.of(w.fromMs, w.toMs) })
  const binned = async (w: ProofWindow) => {
    const record = await prepared(w)
    const interval = Number.isFinite(record.intervalS) ? record.intervalS : BIN_S
    const inside = (await hours()).filter(h => h.fromMs > w.fromMs - HOUR_MS && h.fromMs < w.toMs)
    return { interval, record: (binS: number) => proofRecord(record, w, inside, binS) }
  }
  return {
    hasData: async (w: ProofWindow) => (await read(w)).t.length > 1,
    /** the end of the time that the last sample inside the window stands for; null when it holds none */
    endOfData: async (w: ProofWindow) => {
      const { t } = await read(w)
      return t.length > 1 ? Math.min(w.toMs, t[t.length - 1]! + medianInterval(t)) : null
    },
    compare: async (before: ProofWindow, after: ProofWindow, seed: number, level?: number) => {
      // both windows in the same bins; the first is binned before the second is read into the same memory
      const first = await binned(before)
      const binS = Math.max(BIN_S, first.interval)
      const b = first.record(binS)
      const second = await binned(after)
      const a = second.record(Math.max(binS, second.interval))
      const same = a.binS === b.binS ? b : (await binned(before)).record(a.binS)
      return compareWindows(same, a, { pvSpan: setup.pvHigh - setup.pvLow, opSpan: setup.opHigh - setup.opLow, settlingS: setup.settlingS, seed, level })
    },
  }
}

function given(from: string | undefined, to: string | undefined, chosen: ProofWindow, name: string): ProofWindow {
  const window = { fromMs: from ? Date.parse(from) : chosen.fromMs, toMs: to ? Date.parse(to) : chosen.toMs }
  const days = (window.toMs - window.fromMs) / (24 * HOUR_MS)
  if (!(days > 0) || days > 60) throw new Refusal(422, 'invalid_input', `The window ${name} must end after it begins and last at most 60 days.`, { issues: [{ path: `${name}To`, message: 'must end after it begins, at most 60 days later' }] })
  return window
}
