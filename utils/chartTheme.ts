import { formatNumber } from '#shared/format/number'

/** Colours of the page as a chart needs them: plain strings, read when the theme changes. */
export function chartColours() {
  const style = getComputedStyle(document.documentElement)
  const read = (name: string) => style.getPropertyValue(name).trim()
  return { ink: read('--ink'), quiet: read('--quiet'), line: read('--line'), act: read('--act'), panel: read('--panel'), warn: read('--warn') }
}

const AXIS_FONT = { fontSize: '12px', fontFamily: 'Inter, system-ui, sans-serif' }

/** What all charts share: no markers, no animation, quiet axes, nothing that the page does not ask for. */
export function chartBase(colours: ReturnType<typeof chartColours>) {
  return {
    chart: { animations: { enabled: false }, toolbar: { show: false }, fontFamily: AXIS_FONT.fontFamily, background: 'transparent', parentHeightOffset: 0 },
    dataLabels: { enabled: false }, legend: { show: false }, markers: { size: 0 },
    grid: { borderColor: colours.line, padding: { left: 8, right: 12, top: 0, bottom: 0 }, xaxis: { lines: { show: false } } },
    tooltip: { enabled: false },
    axis: { labels: { style: { ...AXIS_FONT, colors: colours.quiet } }, axisBorder: { color: colours.line }, axisTicks: { color: colours.line }, title: { style: { ...AXIS_FONT, fontWeight: 400, color: colours.quiet } } },
  }
}

/** A label of an axis: what is only the rounding of the library's steps is 0. */
export const axisNumber = (value: number): string => formatNumber(Math.abs(value) < 1e-12 ? 0 : Number(value.toPrecision(6)))
