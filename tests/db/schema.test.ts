import { readFileSync, writeFileSync } from 'node:fs'
import { afterAll, beforeAll, expect, it } from 'vitest'
import { dumpSchema } from '../../scripts/lib/dumpSchema.mjs'
import { scratchDatabase, type ScratchDatabase } from '../setup/scratchDatabase'

const file = new URL('../../db/schema.sql', import.meta.url)
let scratch: ScratchDatabase
beforeAll(async () => { scratch = await scratchDatabase() })
afterAll(() => scratch.drop())

it('db/schema.sql is what the migrations make (write it anew: UPDATE_SCHEMA=1 npx vitest run tests/db/schema.test.ts)', async () => {
  const dumped = await dumpSchema(scratch.url)
  if (process.env.UPDATE_SCHEMA) writeFileSync(file, dumped)
  expect(dumped).toBe(readFileSync(file, 'utf8'))
})
