import { existsSync, mkdirSync, mkdtempSync, readdirSync, readFileSync, rmSync, statSync, writeFileSync } from 'node:fs'
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
  it('a site without uploads and photos has a backup too, for its owner alone', async () => {
    const bare = join(folder, 'bare')
    mkdirSync(bare)
    const written = await writeState({ url: source.url, dataDir: bare, file: join(folder, 'bare.tar') })
    expect(statSync(written).mode & 0o077).toBe(0)
    expect(readdirSync(bare)).toEqual([])
  })
  it('where the database cannot be replaced, everything stays as it was', async () => {
    await target.db.raw('create schema theirs; create function theirs.never() returns event_trigger language plpgsql as $$ begin raise exception \'no tables today\'; end $$')
    await target.db.raw('create event trigger no_tables on ddl_command_start when tag in (\'CREATE TABLE\') execute function theirs.never()')
    try {
      await expect(readState({ url: target.url, dataDir: to(), file: file(), replace: true })).rejects.toThrow(/nothing was changed/)
      expect(await target.db('areas')).toHaveLength(2)
      expect(existsSync(join(to(), 'attachments/3/valve.jpg'))).toBe(true)
    }
    finally { await target.db.raw('drop event trigger no_tables; drop schema theirs cascade') }
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
