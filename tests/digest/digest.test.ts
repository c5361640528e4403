import { describe, expect, it } from 'vitest'
import { digestDueAt } from '../../shared/digest/digestDueAt'
import { digestSentence, renderDigest } from '../../shared/digest/renderDigest'
import type { DigestModel } from '../../shared/digest/model'

describe('digestDueAt', () => {
  // Offsets of Europe/London: GMT in winter, BST (UTC+1) in summer (tz database).
  it('is Monday at the set hour of the zone', () => {
    expect(new Date(digestDueAt('2026-W49', 'Europe/London', 1, 6)).toISOString()).toBe('2026-11-30T06:00:00.000Z')
    expect(new Date(digestDueAt('2026-W27', 'Europe/London', 1, 6)).toISOString()).toBe('2026-06-29T05:00:00.000Z')
  })
  it('never falls into the hour that the clocks skip: 29 Mar 2026 01:00 in London does not exist', () => {
    expect(new Date(digestDueAt('2026-W13', 'Europe/London', 7, 1)).toISOString()).toBe('2026-03-29T01:00:00.000Z') // 02:00 BST
  })
  it('nor into the doubled one: 25 Oct 2026 01:00 in London comes twice', () => {
    expect(new Date(digestDueAt('2026-W43', 'Europe/London', 7, 1)).toISOString()).toBe('2026-10-25T02:00:00.000Z') // 02:00 GMT
  })
  it('knows zones of half hours', () => {
    expect(new Date(digestDueAt('2026-W49', 'Asia/Kolkata', 1, 6)).toISOString()).toBe('2026-11-30T00:30:00.000Z')
  })
  it('refuses weekdays and hours that are none', () => {
    expect(() => digestDueAt('2026-W49', 'UTC', 0, 6)).toThrow(/weekday/)
    expect(() => digestDueAt('2026-W49', 'UTC', 1, 24)).toThrow(/hour/)
  })
})

const model: DigestModel = {
  siteName: 'Tarn Hollow Tileworks', week: '2026-W48', zone: 'Europe/London', areas: [], loops: 238, lostHours: 531, change: -47,
  byState: [{ state: 'hunting', hours: 212 }, { state: 'manual', hours: 118 }],
  worst: [{ tag: 'FIC-2107', description: 'Mill <feed> water', area: 'Glaze preparation', ribbon: 'h'.repeat(168), lostHours: 63, change: 15, form: 'ideal', verdict: 'huntingValve', confidence: 0.86 }],
  better: [], groups: [{ letter: 'A', periodS: 2280, members: 9, source: 'FIC-2107' }],
  tickets: [{ id: 12, title: 'PIC-4002 runs against its limit', state: 'inWork', dueOn: '2026-11-27', assignee: 'T. Technician', overdue: true }],
  wins: [{ ticketId: 7, title: 'TIC-1204 hunts', hoursPerWeek: 41.4, provisional: true, outcome: 'retuned' }],
  slidBack: [{ ticketId: 5, followUpId: 14, title: 'LIC-3001 slid back after ticket 5' }],
  publicUrl: 'https://fettle.example',
}

describe('renderDigest', () => {
  const { subject, text, html } = renderDigest(model, 'https://fettle.example/u/abcdefghijkl')
  it('opens with one sentence built from the figures', () => {
    expect(digestSentence(model)).toBe('238 loops lost 531 loop-hours, 47 fewer than the week before; most of them (212) to hunting.')
    expect(subject).toContain('531')
  })
  it('says the same in text and HTML, with links', () => {
    for (const body of [text, html]) {
      for (const fact of ['FIC-2107', '63 h', 'PIC-4002', 'overdue', '41 h a week', 'provisional', '38 min', 'in work', 'LIC-3001 slid back', 'https://fettle.example/u/abcdefghijkl', 'https://fettle.example/loops?week=2026-W48']) expect(body).toContain(fact)
    }
  })
  it('draws the ribbon in 28 plain table cells whose letters read without colour', () => {
    const cells = html.match(/<td width="9"[^>]*>h<\/td>/g)
    expect(cells).toHaveLength(28)
    expect(text).toContain('hhhh hhhh hhhh hhhh hhhh hhhh hhhh')
  })
  it('escapes what people wrote, and loads nothing from anywhere', () => {
    expect(html).toContain('Mill &lt;feed&gt; water')
    expect(html).not.toMatch(/<img|<script|<link|url\(/)
  })
})
