/** A reason from the numerics, as a sentence. */
export function sentence(reason: string): string {
  return `${reason.charAt(0).toUpperCase()}${reason.slice(1)}${reason.endsWith('.') ? '' : '.'}`
}
