import { createHash } from 'node:crypto'
import { readdirSync, readFileSync, statSync } from 'node:fs'
import { root } from './paths.mjs'

function* filesUnder(path) {
  const stat = statSync(`${root}/${path}`, { throwIfNoEntry: false })
  if (!stat) return
  if (stat.isFile()) yield path
  else for (const name of readdirSync(`${root}/${path}`).sort()) yield* filesUnder(`${path}/${name}`)
}

/** One hash over the names and contents of files and folders (relative to the root); what is absent is skipped. */
export function hashOf(paths) {
  const hash = createHash('sha256')
  for (const path of paths) for (const file of filesUnder(path)) hash.update(`${file}\0`).update(readFileSync(`${root}/${file}`)).update('\0')
  return hash.digest('hex')
}

export const workerSources = ['package-lock.json', 'scripts/lib/build.mjs', 'server', 'db', 'shared']
export const webSources = ['package-lock.json', 'nuxt.config.ts', 'tailwind.config.ts', 'app.vue', 'error.vue', 'pages', 'components', 'composables', 'layouts', 'middleware', 'modules', 'stores', 'plugins', 'utils', 'assets', 'public', 'server', 'db', 'shared']
