/** Rows [from, to) to draw of a long list of equal rows, and the px of room above and below that stands for the rest. */
export function rowWindow(p: { count: number, rowHeight: number, scrolled: number, visible: number, spare: number }): { from: number, to: number, above: number, below: number } {
  // even numbers, so that striped or counted rows keep their place while scrolling
  const first = Math.floor(p.scrolled / p.rowHeight) - p.spare
  const from = Math.min(Math.max(0, first - (first % 2)), Math.max(0, p.count - 1))
  const to = Math.min(p.count, Math.max(from, Math.ceil((p.scrolled + p.visible) / p.rowHeight) + p.spare))
  return { from, to, above: from * p.rowHeight, below: (p.count - to) * p.rowHeight }
}
