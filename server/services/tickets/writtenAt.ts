/** When an entry was written on a device: a clock that runs ahead must not put it into the future. */
export function writtenAt(at: Date | undefined, now = new Date()): Date {
  return at && at < now ? at : now
}
