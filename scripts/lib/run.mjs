import { spawn } from 'node:child_process'
import { Interrupted, Stop } from './say.mjs'

/**
 * Runs a program to its end and answers `{ code, output }`; `quiet` keeps its words back unless it fails.
 * `orStop` is the sentence that a failure ends with. With `signal` (or `apart`) the program has a process group of its own,
 * so that Ctrl-C reaches only us; an aborted signal ends it and rejects with `Interrupted`.
 * With `ipc` it can tell that we are gone.
 */
export function run(program, args, { cwd, env = process.env, quiet = false, orStop, input, signal, apart = Boolean(signal), ipc = false } = {}) {
  return new Promise((resolve, reject) => {
    if (signal?.aborted) return reject(new Interrupted())
    const child = spawn(program, args, { cwd, env, detached: apart, stdio: [input === undefined ? 'ignore' : 'pipe', quiet ? 'pipe' : 'inherit', quiet ? 'pipe' : 'inherit', ...(ipc ? ['ipc'] : [])] })
    const end = () => { try { process.kill(-child.pid, 'SIGTERM') } catch { /* it has ended */ } }
    signal?.addEventListener('abort', end)
    let output = ''
    child.stdout?.on('data', (chunk) => { output += chunk })
    child.stderr?.on('data', (chunk) => { output += chunk })
    child.stdin?.end(input)
    child.on('error', error => orStop ? reject(new Stop(`${orStop} (${error.message})`)) : reject(error))
    child.on('close', (code) => {
      signal?.removeEventListener('abort', end)
      if (signal?.aborted) reject(new Interrupted())
      else if (code !== 0 && orStop) reject(new Stop(`${essence(output)}${orStop}`))
      else resolve({ code: code ?? 1, output })
    })
  })
}

/** What a failed program said that matters: from its first line with an error on, and not a screenful more. */
function essence(output) {
  const lines = output.trim().split('\n')
  const first = lines.findIndex(line => /(^|\s)(error|fatal)\b(?!-)/i.test(line))
  return lines.slice(first < 0 ? -25 : first).slice(0, 25).map(line => `${line}\n`).join('')
}
