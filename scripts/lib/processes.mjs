import { spawn } from 'node:child_process'

/** Children of a start. They live in process groups of their own, so that Ctrl-C reaches only us and we end them in order. */
export function createProcesses(onUnexpectedEnd) {
  const running = new Map()
  let stopping = false
  function launch(name, program, args, env) {
    // "ipc": a child that loses its parent ends itself
    const child = spawn(program, args, { env, detached: true, stdio: ['ignore', 'inherit', 'inherit', 'ipc'] })
    running.set(name, child)
    child.on('error', error => onUnexpectedEnd(name, error.message))
    child.on('exit', (code, signal) => {
      running.delete(name)
      if (!stopping) onUnexpectedEnd(name, signal ? `by ${signal}` : `with code ${code}`)
    })
    return child
  }
  async function stopAll(graceMs = 6000) {
    stopping = true
    await Promise.all([...running.values()].map(child => new Promise((resolve) => {
      const hard = setTimeout(() => child.kill('SIGKILL'), graceMs)
      child.once('exit', () => { clearTimeout(hard); resolve() })
      child.kill('SIGTERM')
    })))
  }
  return { launch, stopAll }
}
