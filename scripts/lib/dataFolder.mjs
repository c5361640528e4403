import { randomBytes } from 'node:crypto'
import { accessSync, constants, existsSync, mkdirSync, readFileSync, renameSync, rmSync, writeFileSync } from 'node:fs'
import { resolve } from 'node:path'
import { root } from './paths.mjs'
import { Stop } from './say.mjs'

/** The data folder of this start (made when absent), as an absolute path. */
export function dataFolder(env = process.env) {
  const folder = resolve(root, env.DATA_DIR || '.data')
  try { mkdirSync(folder, { recursive: true, mode: 0o711 }) }
  catch (error) { throw new Stop(`The folder ${folder} (DATA_DIR) cannot be made (${error.code}). Set DATA_DIR to a folder that this user may write to.`) }
  try { accessSync(folder, constants.W_OK | constants.X_OK) }
  catch (error) { throw new Stop(`The folder ${folder} (DATA_DIR) cannot be written to (${error.code}). Start as the user whom it belongs to, or set another DATA_DIR.`) }
  return folder
}

/** A private file that is there whole or not at all, whatever happens meanwhile. */
export function writeWhole(file, text) {
  writeFileSync(`${file}.partly`, text, { mode: 0o600 })
  renameSync(`${file}.partly`, file)
}

/** Secrets of an installation, made once: the key that seals the session cookie and the demo passwords. */
export function secrets(folder) {
  const file = `${folder}/secrets.json`
  if (existsSync(file)) {
    try { return JSON.parse(readFileSync(file, 'utf8')) }
    catch (error) { throw new Stop(`${file} cannot be read (${error.code ?? 'it is damaged'}). Start as the user whom it belongs to; if it is damaged, remove it: everybody signs in again, and the demo accounts get new passwords.`) }
  }
  const word = bytes => randomBytes(bytes).toString('base64url')
  const demoPasswords = Object.fromEntries(['admin', 'engineer', 'technician', 'viewer'].map(role => [`${role}@fettle.example`, word(9)]))
  const made = { sessionPassword: word(36), demoPasswords }
  writeWhole(file, `${JSON.stringify(made, null, 2)}\n`)
  return made
}

/** Process id of a start (or a restore) that runs on this data folder, or null. */
export function runningStart(folder) {
  const file = `${folder}/start.pid`
  if (!existsSync(file)) return null
  const pid = Number(readFileSync(file, 'utf8'))
  // the number may have been given to another program since
  try { return /(start|restore)\.mjs/.test(readFileSync(`/proc/${pid}/cmdline`, 'utf8')) && pid !== process.pid ? pid : null }
  catch { return null }
}

export function claim(folder) {
  const other = runningStart(folder)
  if (other) throw new Stop(`Fettle already runs on ${folder} (process ${other}). Stop it first, or set another DATA_DIR and PORT.`)
  writeFileSync(`${folder}/start.pid`, String(process.pid))
  process.on('exit', () => rmSync(`${folder}/start.pid`, { force: true }))
}
