import { existsSync } from 'node:fs'
import { dirname, resolve } from 'node:path'
import { fileURLToPath, pathToFileURL } from 'node:url'
import { Piscina } from 'piscina'

/** A pool for one thread file: the bundled one beside the worker (from the web server: in the worker's build), or the source through tsx when run from the sources. `kept` threads stay however long nothing is asked of them. */
export function threadPool(name: string, threads: number, kept = 0): Piscina {
  let folder = dirname(fileURLToPath(import.meta.url))
  for (let up = 0; up < 9; up++, folder = dirname(folder)) {
    const bundled = [`threads/${name}.mjs`, `.build/worker/threads/${name}.mjs`].map(path => resolve(folder, path)).find(existsSync)
    if (bundled) return new Piscina({ filename: pathToFileURL(bundled).href, minThreads: kept, maxThreads: threads, idleTimeout: 300_000 })
    const source = resolve(folder, `server/threads/${name}.ts`)
    if (existsSync(source)) return new Piscina({ filename: pathToFileURL(source).href, minThreads: kept, maxThreads: threads, idleTimeout: 300_000, execArgv: ['--import', 'tsx'] })
  }
  throw new Error(`The thread file ${name} was not found.`)
}
