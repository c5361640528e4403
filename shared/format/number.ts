/** Numbers as people read them: three significant digits, a real minus sign, groups of three set apart. */

const MINUS = '\u2212'
// ISO 80000-1:2022, 7.3.1: digits are grouped in threes by a small space, never by a comma or a point.
const GROUP = '\u202F'
/** What stands where a figure cannot be told. */
export const NOTHING = '\u2013'

const isMissing = (value: number | null | undefined): value is null | undefined =>
  value === null || value === undefined || !Number.isFinite(value)

function grouped(digits: string): string {
  const [whole, part] = digits.split('.')
  // four digits stay together, as in years: the eye reads them at once
  const spaced = whole.length > 4 ? whole.replace(/\B(?=(\d{3})+$)/g, GROUP) : whole
  return part === undefined ? spaced : `${spaced}.${part}`
}

const signed = (value: number, digits: string): string => `${value < 0 && /[1-9]/.test(digits) ? MINUS : ''}${digits}`

const SUPERSCRIPTS = '⁰¹²³⁴⁵⁶⁷⁸⁹'
const raised = (exponent: number): string => (exponent < 0 ? '⁻' : '') + [...String(Math.abs(exponent))].map(digit => SUPERSCRIPTS[Number(digit)]).join('')

/** Three significant digits (or as many as asked); a dash for null and NaN. `12 300`, `0.0457`, `−2.10`. */
export function formatNumber(value: number | null | undefined, significant = 3): string {
  if (isMissing(value)) return NOTHING
  if (value === 0) return '0'
  const size = Math.abs(value)
  if (size < 1e-4 || size >= 1e7) {
    const [mantissa, exponent] = size.toExponential(significant - 1).split('e')
    return signed(value, `${mantissa} × 10${raised(Number(exponent))}`)
  }
  const rounded = Number(size.toPrecision(significant))
  // decimals counted after rounding: 9.996 becomes 10.0, not 10.00
  const decimals = Math.max(0, significant - 1 - Math.floor(Math.log10(rounded)))
  return signed(value, grouped(rounded.toFixed(decimals)))
}

/** The value as it is, for a tooltip. */
export function formatFull(value: number | null | undefined): string {
  return isMissing(value) ? NOTHING : String(value).replace(/-/g, MINUS)
}

/** A count or whole hours: all digits. */
export function formatCount(value: number | null | undefined): string {
  return isMissing(value) ? NOTHING : signed(value, grouped(String(Math.abs(Math.round(value)))))
}

/** A change of a count, with its sign: `+15`, `−2`, `0`. */
export function formatChange(value: number | null | undefined): string {
  if (isMissing(value)) return NOTHING
  const whole = Math.round(value)
  return whole > 0 ? `+${formatCount(whole)}` : formatCount(whole)
}

/** A fraction 0..1 in percent without the sign, for a column whose header says %: at most two decimals. */
export function formatPercent(fraction: number | null | undefined): string {
  if (isMissing(fraction)) return NOTHING
  const percent = fraction * 100
  if (Math.abs(percent) < 0.005) return '0'
  return Math.abs(percent) < 0.995 ? signed(percent, Math.abs(percent).toFixed(2)) : formatNumber(percent)
}

/** A probability for a sentence: whole percent, and never a certainty that nobody has. */
export function formatConfidence(probability: number | null | undefined): string {
  if (isMissing(probability)) return NOTHING
  return `${Math.min(99, Math.max(1, Math.round(probability * 100)))} %`
}
