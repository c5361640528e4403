import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { migrate } from '../../db/migrate'
import { migrations } from '../../db/migrations/index'
import { scratchDatabase, type ScratchDatabase } from '../setup/scratchDatabase'

let empty: ScratchDatabase

beforeAll(async () => { empty = await scratchDatabase({ empty: true }) })
afterAll(() => empty.drop())

describe('migrations', () => {
  it('run on an empty database, and a second time change nothing', async () => {
    expect(await migrate(empty.db)).toEqual(migrations.map(m => m.name))
    expect(await migrate(empty.db)).toEqual([])
  })
  it('are named in order, each once', () => {
    const names = migrations.map(m => m.name)
    expect(names).toEqual([...new Set(names)].sort())
  })
})
