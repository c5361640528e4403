import { existsSync, mkdirSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { readState, writeState } from '../../scripts/lib/stateFile.mjs'
import { makeAccounts } from '../setup/accounts'
import { scratchDatabase, type ScratchDatabase } from '../setup/scratchDatabase'

let source: ScratchDatabase
let target: ScratchDatabase
let folder: string
const from = () => join(folder, 'from')
const to = () => join(folder, 'to')
const file = () => join(folder, 'site.tar')

beforeAll(async () => {
  folder = mkdtempSync(join(tmpdir(), 'fettle-backup-'))
  source = await scratchDatabase()
  target = await scratchDatabase({ empty: true })
  await makeAccounts(source.db)
  await source.db('areas').insert({ name: 'Kilns' })
  mkdirSync(join(from(), 'uploads'), { recursive: true })
  mkdirSync(join(from(), 'attachments/3'), { recursive: true })
  mkdirSync(to())
  writeFileSync(join(from(), 'attachments/3/valve.jpg'), Buffer.from([0xFF, 0xD8, 0, 7]))
  writeFileSync(join(from(), 'secrets.json'), '{}')
})
afterAll(async () => {
  await source.drop()
  await target.drop()
  rmSync(folder, { recursive: true, force: true })
})

describe('backup and restore', () => {
  it('bring rows, identities and files to another place, but no secrets', async () => {
    await writeState({ url: source.url, dataDir: from(), file: file() })
    await readState({ url: target.url, dataDir: to(), file: file(), replace: false })
    for (const table of ['users', 'areas', 'schema_migrations']) expect(await target.db(table).orderBy('id')).toEqual(await source.db(table).orderBy('id'))
    expect([...readFileSync(join(to(), 'attachments/3/valve.jpg'))]).toEqual([0xFF, 0xD8, 0, 7])
    expect(existsSync(join(to(), 'secrets.json'))).toBe(false)
    // identities go on after the highest, so that a new row does not collide
    const [{ id }] = await target.db('areas').insert({ name: 'Dryers' }).returning('id')
    expect(id).toBeGreaterThan(1)
  })
  it('a site in use is not replaced unasked', async () => {
    await expect(readState({ url: target.url, dataDir: to(), file: file(), replace: false })).rejects.toThrow(/--replace/)
    expect(await target.db('areas')).toHaveLength(2)
    await readState({ url: target.url, dataDir: to(), file: file(), replace: true })
    expect(await target.db('areas')).toHaveLength(1)
  })
  it('a damaged or foreign file changes nothing', async () => {
    const bad = join(folder, 'bad.tar')
    writeFileSync(bad, readFileSync(file()).subarray(0, 20_000))
    await expect(readState({ url: target.url, dataDir: to(), file: bad, replace: true })).rejects.toThrow(/damaged|not a backup/)
    writeFileSync(bad, 'hello')
    await expect(readState({ url: target.url, dataDir: to(), file: bad, replace: true })).rejects.toThrow(/not a backup/)
    expect(await target.db('users')).toHaveLength(4)
  })
})
