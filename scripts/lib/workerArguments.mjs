/**
 * How node runs whatever computes in threads. Collecting garbage by itself costs a thread a little more time, but the
 * helpers that would do it at once take the cores from the threads beside it (a fifth to a third of all time, measured with
 * two threads on two cores); a larger young space is collected less often.
 */
export const workerArguments = ['--single-threaded-gc', '--max-semi-space-size=32']
