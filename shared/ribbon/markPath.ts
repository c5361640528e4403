import type { Pattern } from './states'

/** One tile of a pattern, repeated to the right: an SVG path that canvas and SVG both read, in px. */
export interface Mark { width: number, path: string, stroke: number | null }

/** Below this height a mark is no longer a pattern but dirt. */
export const SMALLEST_MARKED_HEIGHT = 8

/** The mark of a state's pattern for a strip of a given height (px), or null where it has none. */
export function markPath(pattern: Pattern, height: number): Mark | null {
  if (height < SMALLEST_MARKED_HEIGHT) return null
  const middle = height / 2
  switch (pattern) {
    case 'wave': {
      // the control point of a quadratic curve pulls twice as far as the curve goes
      const pull = height * 0.5
      return { width: 8, path: `M-2 ${middle}q2 ${pull} 4 0t4 0 4 0`, stroke: 1 }
    }
    case 'line':
      return { width: 8, path: `M0 ${middle}h8`, stroke: Math.max(1.6, height / 12) }
    case 'slant': {
      const width = Math.max(5, Math.round(height / 4))
      return { width, path: `M${-width} ${height}L0 0M0 ${height}L${width} 0M${width} ${height}L${2 * width} 0`, stroke: 1.1 }
    }
    case 'dots': {
      let path = ''
      const rows = Math.max(2, Math.round(height / 7))
      for (let i = 0; i < rows; i++) path += `M${i % 2 ? 3.9 : 1.4} ${(height * (i + 0.5)) / rows - 1}a1 1 0 1 0 .01 0z`
      return { width: 5, path, stroke: null }
    }
    case 'hatch': {
      let path = ''
      for (let y = -6; y < height; y += 6) path += `M0 ${y}l6 6M6 ${y}l-6 6`
      return { width: 6, path, stroke: 0.7 }
    }
    case 'edge':
      return { width: 4, path: `M0 .5h2M0 ${height - 0.5}h2`, stroke: 1 }
    default:
      return null
  }
}
