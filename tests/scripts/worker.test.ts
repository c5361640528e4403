import { readFileSync } from 'node:fs'
import { join } from 'node:path'
import { expect, it } from 'vitest'
import { workerArguments } from '../../scripts/lib/workerArguments.mjs'
import { rehearse } from '../../server/services/assessments/rehearse'

it('`npm run worker` runs node as the start does', () => {
  const { scripts } = JSON.parse(readFileSync(join(import.meta.dirname, '../../package.json'), 'utf8'))
  expect(scripts.worker).toBe(`exec node ${workerArguments.join(' ')} scripts/worker.mjs`)
})

it('the loops of a rehearsal are such as an assessment takes', () => {
  expect(() => rehearse(1)).not.toThrow()
})
