/**
 * Draws ribbons on a canvas, one row each, without gaps between the hours.
 *
 * Canvas, not SVG, by measurement (headless Chromium, software rendering, two busy cores, 2,000 loop-weeks, three
 * rounds each). Stacked for eight areas: first frame after 90 to 135 ms with 13 elements, against 540 to 900 ms with
 * 22,700. One strip per row: 690 to 830 ms with 2,000 elements, against 770 to 1,890 ms with 25,700; scrolling alike.
 */
import { STATE_COLOURS, type Theme } from '../shared/ribbon/colours'
import { markPath } from '../shared/ribbon/markPath'
import { runsOf } from '../shared/ribbon/runsOf'
import { wordsOf } from '../shared/ribbon/states'
import type { LedgerState } from '../shared/assessment/types'

export interface RibbonLook {
  /** px on screen */
  width: number
  /** of a marked row: the patterns are made for it */
  rowHeight: number
  gap: number
  /** where each row begins and the whole ends, px (rowTops) */
  tops: readonly number[]
  theme: Theme
  /** device pixels per px */
  ratio: number
  /** hours with which a day begins; a tick stands before each but the first */
  ticks: readonly number[]
  /** colour of the ticks: the ground under the ribbon */
  ground: string
}

type Canvas2d = CanvasRenderingContext2D
const tiles = new Map<string, CanvasPattern | null>()

/** The mark of a state as a repeating tile, made once per height, theme and pixel ratio. */
function tileOf(ctx: Canvas2d, state: LedgerState, height: number, theme: Theme, ratio: number): CanvasPattern | null {
  const key = `${state} ${height} ${theme} ${ratio}`
  const known = tiles.get(key)
  if (known !== undefined) return known
  const mark = markPath(wordsOf(state).pattern, height)
  let pattern: CanvasPattern | null = null
  if (mark) {
    const tile = document.createElement('canvas')
    tile.width = Math.round(mark.width * ratio)
    tile.height = Math.round(height * ratio)
    const t = tile.getContext('2d')!
    t.scale(tile.width / mark.width, tile.height / height)
    const path = new Path2D(mark.path)
    t.strokeStyle = t.fillStyle = STATE_COLOURS[theme][state].mark
    if (mark.stroke === null) t.fill(path)
    else { t.lineWidth = mark.stroke; t.stroke(path) }
    pattern = ctx.createPattern(tile, 'repeat-x')
  }
  tiles.set(key, pattern)
  return pattern
}

/** Draws all rows; the canvas must be `width` x the last of `tops` px large, times `ratio`. */
export function drawRibbons(ctx: Canvas2d, ribbons: readonly string[], look: RibbonLook): void {
  const { width, rowHeight, gap, tops, theme, ratio } = look
  const height = Math.round(rowHeight * ratio)
  ctx.setTransform(1, 0, 0, 1, 0, 0)
  ctx.clearRect(0, 0, ctx.canvas.width, ctx.canvas.height)
  ribbons.forEach((ribbon, row) => {
    const y = Math.round(tops[row] * ratio)
    const rowPx = gap > 0 ? height : Math.round(tops[row + 1] * ratio) - y
    // edges are rounded to device pixels: a seam between two hours would look like a tick
    const x = (hour: number) => Math.round((hour * width * ratio) / ribbon.length)
    ctx.setTransform(1, 0, 0, 1, 0, y)
    for (const { state, from, to } of runsOf(ribbon)) {
      const left = x(from)
      const wide = Math.max(1, x(to) - left)
      const { fill } = STATE_COLOURS[theme][state]
      if (fill) { ctx.fillStyle = fill; ctx.fillRect(left, 0, wide, rowPx) }
      const tile = tileOf(ctx, state, rowHeight, theme, ratio)
      if (tile) { ctx.fillStyle = tile; ctx.fillRect(left, 0, wide, rowPx) }
    }
  })
  ctx.setTransform(1, 0, 0, 1, 0, 0)
  ctx.fillStyle = look.ground
  const longest = ribbons.reduce((n, r) => Math.max(n, r.length), 0)
  for (const tick of look.ticks) if (tick > 0 && tick < longest)
    ctx.fillRect(Math.round((tick * width * ratio) / longest) - Math.floor(ratio / 2), 0, Math.max(1, Math.round(ratio)), ctx.canvas.height)
}
