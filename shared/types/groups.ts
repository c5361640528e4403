import type { Verdict } from '../assessment/types'

export interface GroupMemberView { tag: string, description: string, area: string, strength: number, lag: number | null, rank: number, score: number, reasons: string[], ribbon: string, lostHours: number, verdict: Verdict, upstream: string[], pvUnit: string }
export interface GroupView { id: number, week: string, zone: string, weekFrom: number, weekTo: number, letter: string, period: number, likelySource: string | null, evidence: string[], openTicket: number | null, members: GroupMemberView[] }
