import type { H3Event } from 'h3'
import type { Caller } from '../../shared/types/people'
import { requireRole } from './requireRole'

/** Who may look at imports: any person, and a machine that may read or that may import and waits for its own upload. */
export async function requireImportReader(event: H3Event): Promise<Caller> {
  try { return await requireRole(event, 'viewer', 'import') }
  catch (error) {
    if ((error as { statusCode?: number }).statusCode !== 403) throw error
    return await requireRole(event, 'viewer', 'read')
  }
}
