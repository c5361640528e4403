import type { LoopWeekAssessment, Verdict } from '../assessment/types'
import type { ControllerForm } from '../control/types'
import { formatDuration } from './duration'
import { formatNumber } from './number'
import type { Piece } from './sentence'
import { counted } from './words'

const plain = (text: string): Piece => ({ text })
const strong = (text: string): Piece => ({ text, strong: true })

const causes: Partial<Record<Verdict, string>> = {
  huntingTuning: 'it is tuned too tight', huntingValve: 'its valve sticks', huntingExternal: 'the oscillation is carried in from elsewhere',
}

/** What is wrong with a loop in a week and how sure that is, as the page of the loop opens. */
export function loopSentence(tag: string, a: Pick<LoopWeekAssessment, 'verdict' | 'confidence' | 'verdictReason' | 'lostHours' | 'measures' | 'hours'>, form?: ControllerForm): Piece[] {
  const sure = a.verdict === 'cannotTell' ? [] : [plain(` We are ${Math.round(a.confidence * 100)} % sure.`)]
  const lost = counted(a.lostHours, 'hour')
  const period = a.measures.oscillationPeriod
  if (form === 'onOff' && a.verdict === 'huntingTuning') return [strong(tag), plain(period ? ` switches on and off every ${formatDuration(period)} and ` : ' switches on and off and '), strong('swings beyond its tolerance'), plain(`; ${lost} lost.`), ...sure]
  switch (a.verdict) {
    case 'steady':
      return a.lostHours === 0 ? [strong(tag), plain(' was steady all week.')] : [strong(tag), plain(` was steady but for ${lost}.`)]
    case 'huntingTuning': case 'huntingValve': case 'huntingExternal':
      return [strong(tag), plain(period ? ` hunts with a period of ${formatDuration(period)}, most likely because ` : ' hunts, most likely because '), strong(causes[a.verdict]!), plain('.'), ...sure]
    case 'sluggish':
      return [strong(tag), plain(' is '), strong('sluggish'), plain(`: it comes back too slowly after upsets and lost ${lost}.`), ...sure]
    case 'saturated':
      return [strong(tag), plain(' runs '), strong('against a limit'), plain(` of its output; it lost ${lost}.`), ...sure]
    case 'manual':
      return [strong(tag), plain(' was '), strong('left in manual'), plain(` for ${counted(a.hours.manual, 'hour')}.`), ...sure]
    case 'sensor':
      return [strong(tag), plain(': the '), strong('sensor is doubtful'), plain(`; ${lost} lost.`), ...sure]
    case 'noise':
      return [strong(tag), plain(' follows '), strong('mostly noise'), plain(a.measures.reversalsPerDay ? `; its output turns ${formatNumber(a.measures.reversalsPerDay)} times a day.` : '.'), ...sure]
    default:
      return [strong(tag), plain(': the data '), strong('cannot tell'), plain(` what is wrong. ${a.verdictReason}`)]
  }
}
