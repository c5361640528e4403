import { fileURLToPath } from 'node:url'

/** Root of the project, without a trailing slash, and the folder of everything that can be made again. */
export const root = fileURLToPath(new URL('../..', import.meta.url)).replace(/\/$/, '')
export const built = `${root}/.build`
export const webEntry = `${root}/.output/server/index.mjs`
export const workerFolder = `${built}/worker`
