/** An expected end: its message is a whole sentence for the person at the keyboard, so no stack is shown. */
export class Stop extends Error {}

/** The person asked for the end (Ctrl-C, SIGTERM) before the work was done. */
export class Interrupted extends Error {}

export const say = line => process.stdout.write(`${line}\n`)

/** What the machine refuses is no fault of the program: the sentence names the place and what may help. */
function refusedByMachine({ code, path }) {
  if (code === 'ENOSPC') return `There is no room left on the disk${path ? ` for ${path}` : ''}.`
  if (path && ['EACCES', 'EPERM', 'EROFS'].includes(code)) return `This user may not use ${path} (${code}). Start as the user whom it belongs to, or give it to this one.`
}

/** Runs a command's main function and turns whatever stops it into a sentence and an exit code. */
export async function command(main) {
  try {
    process.exitCode = (await main()) ?? 0
  }
  catch (error) {
    if (error instanceof Interrupted) return say('\nStopped before it was ready; the next start goes on from here.')
    const sentence = error instanceof Stop ? error.message : refusedByMachine(error ?? {})
    process.stderr.write(sentence ? `\n${sentence}\n` : `\nThis should not have happened: ${error?.stack ?? error}\n`)
    process.exitCode = 1
  }
}
