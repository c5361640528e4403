import { existsSync, mkdirSync, readFileSync, writeFileSync } from 'node:fs'
import { hashOf } from './sources.mjs'
import { built, root } from './paths.mjs'
import { run } from './run.mjs'
import { say, Stop } from './say.mjs'

const readJson = file => JSON.parse(readFileSync(file, 'utf8'))

/** Whether node_modules holds exactly what the lockfile says; npm notes at the end of an install what it put there. */
function upToDate() {
  const note = `${root}/node_modules/.package-lock.json`
  if (!existsSync(note)) return false
  const there = readJson(note).packages
  return Object.entries(readJson(`${root}/package-lock.json`).packages)
    .every(([path, wanted]) => path === '' || wanted.optional || wanted.peer || wanted.devOptional || there[path]?.version === wanted.version)
}

export async function ensureNodePackages(signal) {
  const [major, minor] = process.versions.node.split('.').map(Number)
  if (major < 20 || (major === 20 && minor < 19)) throw new Stop(`Fettle needs Node.js 20.19 or newer; this is ${process.versions.node}.`)
  if (!upToDate()) {
    say('Installing packages (npm ci) ...')
    await run('npm', ['ci', '--ignore-scripts', '--include=dev', '--no-audit', '--no-fund', '--loglevel=error'], { cwd: root, signal, orStop: 'The packages could not be installed; see above. Is the npm registry reachable?' })
  }
  const hash = hashOf(['package-lock.json', 'nuxt.config.ts'])
  const stamp = `${built}/prepared`
  if (existsSync(`${root}/.nuxt/tsconfig.app.json`) && existsSync(stamp) && readFileSync(stamp, 'utf8') === hash) return
  await run(`${root}/node_modules/.bin/nuxi`, ['prepare'], { cwd: root, quiet: true, signal, orStop: 'Nuxt could not prepare its types; see above.' })
  mkdirSync(built, { recursive: true })
  writeFileSync(stamp, hash)
}
