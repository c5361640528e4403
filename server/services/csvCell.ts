/** A text that a spreadsheet does not run as a formula. */
export const noFormula = (text: string): string => /^[=+\-@\t\r]/.test(text) && !/^[+-]?[\d.,]+(e[+-]?\d+)?$/i.test(text) ? `'${text}` : text

/** A cell of a CSV (RFC 4180) that people open in a spreadsheet. */
export function csvCell(value: unknown): string {
  if (value === null || value === undefined) return ''
  const text = typeof value === 'string' ? noFormula(value) : String(value)
  return /[",\n\r]/.test(text) ? `"${text.replaceAll('"', '""')}"` : text
}
