import type { Knex } from 'knex'
import type { z } from 'zod'
import { insertAudit } from '../../../db/repositories/audit'
import { findImport, updateImport } from '../../../db/repositories/imports'
import { enqueue } from '../../jobs/queue'
import { Refusal } from '../refusal'
import type { mappingAnswerSchema } from './importOptions'

/** Takes the answers of the mapping step; the file is then read from its beginning. */
export async function answerMapping(db: Knex, id: number, answer: z.output<typeof mappingAnswerSchema>, by: { userId: number | null, name: string }): Promise<void> {
  await db.transaction(async (trx) => {
    const found = await findImport(trx, id)
    if (!found) throw new Refusal(404, 'not_found', 'This import was not found.')
    if (found.status !== 'needsMapping') throw new Refusal(409, 'not_asked', `This import waits for no answer; it is ${found.status}.`)
    const { loops: answers, ...rest } = answer
    const before = found.options as { loops?: { tag: string }[] }
    const loops = answers && [...(before.loops ?? []).filter(l => !answers.some(a => a.tag === l.tag)), ...answers]
    await updateImport(trx, id, { status: 'received', options: { ...found.options, ...rest, ...(loops ? { loops } : {}) }, attempts: 0 })
    await insertAudit(trx, { userId: by.userId, actor: by.name, action: 'import.mapping', entity: 'import', entityId: id, data: { ...rest, loops: answers?.length ?? 0 } })
    await enqueue(trx, 'read-imports')
  })
}
