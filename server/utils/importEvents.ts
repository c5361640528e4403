import pg from 'pg'
import { environment } from './environment'

type Listener = () => void
const listeners = new Map<number, Set<Listener>>()
let connecting: Promise<void> | null = null

/** One connection for the whole process, opened with the first listener; when it breaks, the pages poll until it is back. */
async function connect(): Promise<void> {
  const client = new pg.Client({ connectionString: environment().DATABASE_URL, application_name: 'fettle-events', keepAlive: true })
  const lost = () => {
    connecting = null
    client.removeAllListeners('notification')
    client.end().catch(() => {})
  }
  client.on('error', lost)
  client.on('end', lost)
  client.on('notification', ({ payload }) => listeners.get(Number(payload))?.forEach(listener => listener()))
  try {
    await client.connect()
    await client.query('listen fettle_import')
  }
  catch { lost() }
}

/** Calls when an import changed. Answers how to stop. */
export function onImportChange(id: number, listener: Listener): () => void {
  connecting ??= connect()
  const own = listeners.get(id) ?? new Set()
  listeners.set(id, own.add(listener))
  return () => {
    own.delete(listener)
    if (own.size === 0) listeners.delete(id)
  }
}
