/** Calendar day, YYYY-MM-DD, of an instant in a zone. */
export const dayIn = (zone: string, at: Date | number): string => new Intl.DateTimeFormat('sv-SE', { timeZone: zone, dateStyle: 'short' }).format(at)
