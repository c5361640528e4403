/** An expected end: its message is a whole sentence for the person at the keyboard, so no stack is shown. */
export class Stop extends Error {}

export const say = line => process.stdout.write(`${line}\n`)

/** Runs a command's main function and turns whatever stops it into a sentence and an exit code. */
export async function command(main) {
  try {
    process.exitCode = (await main()) ?? 0
  }
  catch (error) {
    process.stderr.write(error instanceof Stop ? `\n${error.message}\n` : `\nThis should not have happened: ${error?.stack ?? error}\n`)
    process.exitCode = 1
  }
}
