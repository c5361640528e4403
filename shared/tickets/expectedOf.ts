/** What the newest change sheet of each loop of a ticket predicts, from the ticket's history. */
export function expectedOf(events: readonly { kind: string, data: Record<string, unknown> }[]): { tag: string, sheetId: number, ratio: number | null }[] {
  const newest = new Map<string, { tag: string, sheetId: number, ratio: number | null }>()
  for (const { kind, data } of events) if (kind === 'changeSheet') newest.set(String(data.tag), { tag: String(data.tag), sheetId: Number(data.sheetId), ratio: typeof data.expectedIaeRatio === 'number' ? data.expectedIaeRatio : null })
  return [...newest.values()]
}
