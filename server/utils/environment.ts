import { readEnvironment, type Environment } from '../services/environment'

let read: Environment | undefined

/** Settings of the process, checked once. */
export function environment(): Environment {
  read ??= readEnvironment(process.env)
  return read
}
