/** Runs something at once and then at an interval, never twice at a time. Answers how to stop it, which waits for the last run. */
export function every(ms: number, name: string, work: () => Promise<unknown>): () => Promise<void> {
  let running: Promise<unknown> | undefined
  const run = () => {
    running ??= work().catch(error => console.error(`${name}:`, (error as Error).message)).finally(() => { running = undefined })
  }
  run()
  const timer = setInterval(run, ms)
  return async () => {
    clearInterval(timer)
    await running
  }
}
