import { spawn } from 'node:child_process'
import { Stop } from './say.mjs'

/**
 * Runs a program to its end and answers `{ code, output }`; `quiet` keeps its words back unless it fails.
 * `orStop` is the sentence that a failure ends with.
 */
export function run(program, args, { cwd, env = process.env, quiet = false, orStop, input } = {}) {
  return new Promise((resolve, reject) => {
    const child = spawn(program, args, { cwd, env, stdio: [input === undefined ? 'ignore' : 'pipe', quiet ? 'pipe' : 'inherit', quiet ? 'pipe' : 'inherit'] })
    let output = ''
    child.stdout?.on('data', (chunk) => { output += chunk })
    child.stderr?.on('data', (chunk) => { output += chunk })
    child.stdin?.end(input)
    child.on('error', error => orStop ? reject(new Stop(`${orStop} (${error.message})`)) : reject(error))
    child.on('close', (code) => {
      if (code !== 0 && orStop) reject(new Stop(`${essence(output)}${orStop}`))
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
