import { formatCount } from '../format/number'
import { hoursOf, lostOf } from './hoursOf'
import { STATES } from './states'

/** The week in words, for a reader who cannot see the strip: `168 hours, 56 lost: 50 hunting, 6 off target; 112 steady.` */
export function ribbonSummary(ribbon: string): string {
  if (ribbon === '') return 'No hours.'
  const hours = hoursOf(ribbon)
  const named = (wanted: boolean) => STATES.filter(s => s.lost === wanted && hours[s.state] > 0).map(s => `${formatCount(hours[s.state])} ${s.label}`).join(', ')
  const lost = lostOf(hours)
  const parts = [lost > 0 ? `${formatCount(lost)} lost: ${named(true)}` : 'none lost', named(false)].filter(Boolean)
  return `${formatCount(ribbon.length)} hours, ${parts.join('; ')}.`
}
