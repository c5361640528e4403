import { expect, it } from 'vitest'
import { rejectsCsv } from '../../server/services/imports/rejectsCsv'

it('a cell of the file that a spreadsheet would run as a formula is shown, not run; a number keeps its minus', () => {
  const row = (cell: string) => rejectsCsv([{ line: 2, column: 'FIC-1.PV', cell, reason: 'not a number' }]).split('\r\n')[1]
  expect(row('=HYPERLINK("http://x.example")')).toBe('2,"FIC-1.PV","\'=HYPERLINK(""http://x.example"")","not a number"')
  expect(row('@SUM(A1)')).toBe('2,"FIC-1.PV","\'@SUM(A1)","not a number"')
  expect(row('-5,3')).toBe('2,"FIC-1.PV","-5,3","not a number"')
})
