import { formatCount, formatNumber, NOTHING } from './number'

const steps: { unit: string, seconds: number, below: number }[] = [
  { unit: 's', seconds: 1, below: 120 },
  { unit: 'min', seconds: 60, below: 120 * 60 },
  { unit: 'h', seconds: 3600, below: 48 * 3600 },
  { unit: 'd', seconds: 86_400, below: Infinity },
]

/** A duration in the unit that reads best, two significant digits below 100: `45 s`, `4.2 min`, `38 min`, `3.5 h`. */
export function formatDuration(seconds: number | null | undefined): string {
  if (seconds === null || seconds === undefined || !Number.isFinite(seconds)) return NOTHING
  const size = Math.abs(seconds)
  const { unit, seconds: length } = steps.find(step => size < step.below) ?? steps[3]
  const amount = seconds / length
  return `${Math.abs(amount) >= 9.95 ? formatCount(amount) : formatNumber(amount, 2)} ${unit}`
}

/** Bytes in binary multiples by their IEC names: `3.5 MiB`. */
export function formatBytes(bytes: number | null | undefined): string {
  if (bytes === null || bytes === undefined || !Number.isFinite(bytes)) return NOTHING
  const names = ['B', 'KiB', 'MiB', 'GiB', 'TiB']
  const power = bytes < 1 ? 0 : Math.min(names.length - 1, Math.floor(Math.log2(bytes) / 10))
  return `${power === 0 ? Math.round(bytes) : formatNumber(bytes / 1024 ** power)} ${names[power]}`
}
