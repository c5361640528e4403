import { RIBBON_LETTERS } from '../assessment/types'
import { formatDuration } from '../format/duration'
import { formatDate, formatWeek } from '../format/date'
import { verdictWords } from '../format/words'
import { coarseCells } from '../ribbon/coarseCells'
import { STATE_COLOURS } from '../ribbon/colours'
import { OUTCOME_WORDS, STATE_WORDS } from '../types/tickets'
import type { DigestLoop, DigestModel } from './model'

const escape = (text: string) => text.replace(/&/g, '&amp;').replace(/</g, '&lt;').replace(/>/g, '&gt;').replace(/"/g, '&quot;')

const MARKS: Readonly<Record<string, string>> = { noData: '·', down: '×', steady: '' }

/**
 * The ribbon as plain table cells, 28 of a quarter of a day each, a gap at midnight. Every lost state also carries its
 * letter, so that the ribbon reads in black and white and where a mail program darkens the page.
 */
export function ribbonCells(ribbon: string): string {
  const cells = coarseCells(ribbon).map(({ state }, index) => {
    const { fill, mark } = STATE_COLOURS.light[state]
    const ground = fill ?? '#FFFFFF'
    const midnight = index % 4 === 0 && index > 0 ? 'border-left:2px solid #ffffff;' : ''
    return `<td width="9" height="16" align="center" bgcolor="${ground}" style="width:9px;height:16px;background:${ground};color:${mark};${midnight}font:9px/16px Arial,sans-serif;padding:0">${(MARKS[state] ?? RIBBON_LETTERS[state]) || '&nbsp;'}</td>`
  }).join('')
  return `<table role="presentation" cellpadding="0" cellspacing="0" border="0" style="border-collapse:collapse"><tr>${cells}</tr></table>`
}

const coarseLetters = (ribbon: string) => coarseCells(ribbon).map(({ state }) => RIBBON_LETTERS[state]).join('').replace(/(.{4})(?=.)/g, '$1 ')

const signed = (n: number) => (n > 0 ? `+${n}` : n < 0 ? `−${-n}` : '±0')
const plural = (n: number, one: string, many = `${one}s`) => `${n} ${n === 1 ? one : many}`

/** The one sentence on top. */
export function digestSentence(m: DigestModel): string {
  const where = m.areas.length ? ` in ${m.areas.join(', ')}` : ''
  if (m.loops === 0) return `No loop was assessed${where} in this week.`
  const change = m.change === null ? '' : m.change === 0 ? ', as many as the week before' : `, ${Math.abs(m.change)} ${m.change < 0 ? 'fewer' : 'more'} than the week before`
  const most = m.byState.filter(s => s.hours > 0).sort((a, b) => b.hours - a.hours)[0]
  const mostly = most ? `; most of them (${most.hours}) to ${stateWords[most.state] ?? most.state}` : ''
  if (m.lostHours === 0) return `${plural(m.loops, 'loop')}${where} lost no hour${change}.`
  return `${plural(m.loops, 'loop')}${where} lost ${m.lostHours} loop-hours${change}${mostly}.`
}

const stateWords: Record<string, string> = { manual: 'manual mode', saturated: 'limits', hunting: 'hunting', offTarget: 'being off target', sensor: 'doubtful sensors' }

function loopTextLine(l: DigestLoop): string {
  const sure = l.confidence === null ? '' : ` (${Math.round(l.confidence * 100)} % sure)`
  return `  ${l.tag}  ${l.lostHours} h lost${l.change === null ? '' : ` (${signed(l.change)})`}  ${verdictWords(l.verdict, l.form)}${sure}\n    ${[l.description, l.area].filter(Boolean).join(', ')}\n    ${coarseLetters(l.ribbon)}`
}

// Programs that know dark mode get colours of ours; all others keep the light ones, or turn both sides of a pair.
const DARK = '@media (prefers-color-scheme:dark){.b{background:#14181B!important}.p{background:#1C2226!important;color:#E6E9EA!important}.p h1{color:#E6E9EA!important}.q,.p h2{color:#9AA6AE!important}.a{color:#6FC3C9!important}.l{border-color:#313A40!important}}'

const INK = '#1D2329'
const QUIET = '#57616A'

export interface RenderedDigest { subject: string, text: string, html: string }

/** The digest as HTML and as full text; both say the same. `unsubscribeUrl` opens a page that asks; it never unsubscribes by itself. */
export function renderDigest(m: DigestModel, unsubscribeUrl: string): RenderedDigest {
  const sentence = digestSentence(m)
  const url = (path: string) => `${m.publicUrl}${path}`
  const loopsUrl = url(`/loops?week=${m.week}`)
  const due = m.tickets.map(t => ({ id: t.id, line: `T-${t.id} ${t.title}, ${STATE_WORDS[t.state]}${t.dueOn ? `, due ${formatDate(t.dueOn, 'UTC')}${t.overdue ? ' (overdue)' : ''}` : ''}${t.assignee ? `, ${t.assignee}` : ''}` }))
  const wins = m.wins.map(w => ({ id: w.ticketId, line: `T-${w.ticketId} ${w.title}: ${w.hoursPerWeek.toFixed(0)} h a week won back (${w.outcome ? OUTCOME_WORDS[w.outcome] : 'closed'}${w.provisional ? ', provisional' : ''})` }))
  const slid = m.slidBack.map(b => ({ id: b.followUpId, line: `T-${b.followUpId} ${b.title}` }))
  const groups = m.groups.map(g => `Group ${g.letter}: ${g.members} loops hunt together with a period of ${formatDuration(g.periodS)}${g.source ? `; the likely source is ${g.source}` : ''}.`)

  const text = [
    `${m.siteName}: ${formatWeek(m.week)}`, '', sentence, '',
    ...(m.worst.length ? ['New or worse', ...m.worst.map(loopTextLine), '  h hunting  o off target  m manual  u at a limit  x sensor  s steady  d down  . no data', ''] : ['No loop became worse.', '']),
    ...(m.better.length ? ['Better than the week before', ...m.better.map(loopTextLine), ''] : []),
    ...(groups.length ? ['Hunting together', ...groups.map(g => `  ${g}`), ''] : []),
    ...(due.length ? ['Tickets due', ...due.map(t => `  ${t.line}`), ''] : []),
    ...(wins.length ? ['Proven', ...wins.map(w => `  ${w.line}`), ''] : []),
    ...(slid.length ? ['Slid back', ...slid.map(b => `  ${b.line}`), ''] : []),
    `All loops: ${loopsUrl}`, `Tickets: ${url('/tickets')}`, '', `You get this mail because you follow ${m.areas.length ? m.areas.join(', ') : 'all areas'}. To stop it: ${unsubscribeUrl}`, '',
  ].join('\n')

  const heading = (words: string) => `<h2 style="font:600 14px/20px Arial,sans-serif;color:${QUIET};margin:22px 0 6px">${words}</h2>`
  // tag and hours share a line, the ribbon has one of its own: both fit a phone
  const loopRow = (l: DigestLoop) => `<tr><td class="l" style="padding:8px 10px 2px 0;border-top:1px solid #DAD8D2;vertical-align:top"><a class="a" href="${escape(url(`/loops/${encodeURIComponent(l.tag)}?week=${m.week}`))}" style="color:#0F5C63;font-weight:bold;text-decoration:none;white-space:nowrap">${escape(l.tag)}</a> <span class="q" style="color:${QUIET};font-size:12px">${escape(l.description)}</span></td><td class="l" align="right" style="padding:8px 0 2px;border-top:1px solid #DAD8D2;vertical-align:top;white-space:nowrap"><b>${l.lostHours} h</b> <span class="q" style="color:${QUIET};font-size:12px">${l.change === null ? '' : signed(l.change)}</span></td></tr><tr><td colspan="2" style="padding:0 0 8px">${ribbonCells(l.ribbon)}<span class="q" style="font-size:12px;color:${QUIET}">${escape(verdictWords(l.verdict, l.form))}${l.confidence === null ? '' : `, ${Math.round(l.confidence * 100)} % sure`}</span></td></tr>`
  const table = (loops: DigestLoop[]) => `<table role="presentation" width="100%" cellpadding="0" cellspacing="0" style="border-collapse:collapse">${loops.map(loopRow).join('')}</table>`
  const list = (lines: string[]) => lines.map(line => `<p style="margin:0 0 6px">${escape(line)}</p>`).join('')
  const ticketList = (lines: { id: number, line: string }[]) => lines.map(({ id, line }) => `<p style="margin:0 0 6px"><a class="a" href="${escape(url(`/tickets/${id}`))}" style="color:#0F5C63;font-weight:bold;text-decoration:none">T-${id}</a> ${escape(line.slice(`T-${id} `.length))}</p>`).join('')
  const html = `<!doctype html><html lang="en"><head><meta charset="utf-8"><meta name="viewport" content="width=device-width"><meta name="color-scheme" content="light dark"><meta name="supported-color-schemes" content="light dark"><style>${DARK}</style><title>${escape(m.siteName)}</title></head>
<body class="b" style="margin:0;background:#F6F5F2"><div class="p" style="max-width:640px;margin:0 auto;padding:20px;background:#FFFFFF;color:${INK};font:14px/20px Arial,sans-serif">
<p class="q" style="margin:0;color:${QUIET}">${escape(m.siteName)}, ${escape(formatWeek(m.week))}</p>
<h1 style="font:600 20px/28px Arial,sans-serif;margin:6px 0 10px;color:${INK}">${escape(sentence)}</h1>
${m.worst.length ? heading('New or worse') + table(m.worst) : '<p>No loop became worse.</p>'}
${m.better.length ? heading('Better than the week before') + table(m.better) : ''}
<p class="q" style="color:${QUIET};font-size:12px;margin:8px 0 0">Each strip is a week in quarters of a day: h hunting, o off target, m manual, u at a limit, x doubtful sensor, blank steady, × down, · no data.</p>
${groups.length ? heading('Hunting together') + list(groups) : ''}
${due.length ? heading('Tickets due') + ticketList(due) : ''}
${wins.length ? heading('Proven') + ticketList(wins) : ''}
${slid.length ? heading('Slid back') + ticketList(slid) : ''}
<p style="margin:22px 0 0"><a class="a" href="${escape(loopsUrl)}" style="color:#0F5C63">All loops of the week</a></p>
<p class="q" style="margin:18px 0 0;color:${QUIET};font-size:12px">You get this mail because you follow ${escape(m.areas.length ? m.areas.join(', ') : 'all areas')}. <a href="${escape(unsubscribeUrl)}" class="q" style="color:${QUIET}">Stop it</a>.</p>
</div></body></html>`
  return { subject: `${m.siteName}, week ${Number(m.week.slice(6))}: ${m.lostHours} loop-hours lost${m.change === null ? '' : ` (${signed(m.change)})`}`, text, html }
}
