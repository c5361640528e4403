import { existsSync, readdirSync } from 'node:fs'
import { run } from './run.mjs'
import { say, Stop } from './say.mjs'

/** Newest installed PostgreSQL's programs, or null. */
export function postgresPrograms() {
  const base = '/usr/lib/postgresql'
  const versions = existsSync(base) ? readdirSync(base).filter(v => existsSync(`${base}/${v}/bin/initdb`)) : []
  versions.sort((a, b) => Number(b) - Number(a))
  return versions[0] ? `${base}/${versions[0]}/bin` : null
}

const present = { postgresql: () => postgresPrograms() !== null, chromium: () => existsSync('/usr/bin/chromium') }

/** Installs the Debian packages named, where they are missing; without root it says what to install. */
export async function ensureDebianPackages(names) {
  const missing = names.filter(name => !present[name]())
  if (!missing.length) return
  const byHand = `Please install ${missing.join(' and ')}: apt-get install ${missing.join(' ')}`
  if (process.getuid?.() !== 0) throw new Stop(`${byHand} (as root), then start again.`)
  if (!existsSync('/usr/bin/apt-get')) throw new Stop(`This is not a Debian machine. ${byHand} (or what it is called here), then start again.`)
  say(`Installing ${missing.join(', ')} from Debian ...`)
  const env = { ...process.env, DEBIAN_FRONTEND: 'noninteractive' }
  await run('apt-get', ['update', '-q'], { env, quiet: true })
  await run('apt-get', ['install', '-y', '-q', '--no-install-recommends', ...missing], { env, quiet: true, orStop: `Debian could not install ${missing.join(', ')}. ${byHand}` })
  const still = missing.filter(name => !present[name]())
  if (still.length) throw new Stop(`Debian installed ${still.join(', ')}, but its programs are not where they were expected.`)
}
