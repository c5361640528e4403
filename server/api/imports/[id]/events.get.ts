import { findImport } from '../../../../db/repositories/imports'
import { importView, isSettled } from '../../../services/imports/importView'

const POLL_MS = 2000

/**
 * The import as server-sent events: at once, on every change, and for the last time when it is settled or when the
 * caller may no longer look.
 */
export default defineEventHandler(async (event) => {
  await requireImportReader(event)
  const { id } = await readImportId(event)
  const { res } = event.node
  setHeader(event, 'content-type', 'text/event-stream')
  setHeader(event, 'cache-control', 'no-cache, no-transform')
  setHeader(event, 'x-accel-buffering', 'no')
  res.flushHeaders()

  await new Promise<void>((resolve) => {
    let last = ''
    let busy = false
    let again = false
    const send = async () => {
      if (busy) { again = true; return }
      busy = true
      try {
        event.context.person = undefined
        const may = await requireImportReader(event).then(() => true, error => ![401, 403].includes((error as { statusCode?: number }).statusCode ?? 500))
        const found = may ? await findImport(database(), id) : null
        const text = found && JSON.stringify(importView(found))
        if (text && text !== last) res.write(`data: ${last = text}\n\n`)
        else res.write(': still here\n\n')
        if (!found || isSettled(found)) end()
      }
      catch { /* the database is away; the next poll asks again */ }
      busy = false
      if (again) { again = false; await send() }
    }
    const stop = onImportChange(id, send)
    const timer = setInterval(send, POLL_MS)
    const end = () => {
      clearInterval(timer)
      stop()
      resolve()
    }
    event.node.req.on('close', end)
    send()
  })
  res.end()
})
