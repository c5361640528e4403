import type { Role } from '../../shared/types/people'

export interface AccessRow {
  route: string
  /** the lowest role that may; `anybody`: also without sign-in */
  who: Role | 'anybody'
  /** scopes of which a machine's token must carry one; none: tokens are refused */
  scopes: ('read' | 'import')[]
}

const rows = (who: AccessRow['who'], scopes: AccessRow['scopes'], ...routes: string[]): AccessRow[] => routes.map(route => ({ route, who, scopes }))

/** Who may call what, written down by hand from the roles of the product; access.test.ts holds every route file to it. */
export const accessMatrix: AccessRow[] = [
  ...rows('anybody', [],
    'GET /api/health', 'POST /api/auth/sign-in', 'POST /api/auth/sign-out', 'POST /api/auth/reset', 'POST /api/auth/link', 'POST /api/auth/set-password',
    'OPTIONS /api/uploads', 'POST /u/[token]'),
  // everybody signed in reads everything; what a machine may read too
  ...rows('viewer', ['read'],
    'GET /api/areas', 'GET /api/outages', 'GET /api/weeks', 'GET /api/plant', 'GET /api/benefit', 'GET /api/groups', 'GET /api/loops', 'GET /api/loops/[tag]', 'GET /api/loops/[tag]/trend', 'GET /api/loops/[tag]/change-sheets', 'GET /api/change-sheets/[id]',
    'GET /api/tickets', 'GET /api/tickets/[id]', 'GET /api/tickets/[id]/proof', 'GET /api/tickets/[id]/files/[fileId]'),
  ...rows('viewer', [],
    'GET /api/auth/me', 'GET /api/account', 'PATCH /api/account', 'POST /api/account/password', 'GET /api/people/names', 'GET /api/settings',
    'GET /api/saved-views', 'POST /api/saved-views', 'PATCH /api/saved-views/[id]', 'DELETE /api/saved-views/[id]',
    'GET /api/digests', 'GET /api/digests/preview', 'GET /api/digests/subscription', 'PUT /api/digests/subscription',
    'POST /api/tickets/[id]/comments', 'POST /api/loops/[tag]/concerns'),
  // Viewers comment and watch through these; what else a caller may do to a ticket depends on whose it is, and is decided in the service.
  ...rows('viewer', [], 'POST /api/tickets/[id]/entries', 'PATCH /api/tickets/[id]'),
  ...rows('technician', [], 'POST /api/tickets/[id]/files'),
  ...rows('engineer', [],
    'POST /api/outages', 'PATCH /api/outages/[id]', 'DELETE /api/outages/[id]', 'PATCH /api/loops/[tag]',
    'POST /api/loops/[tag]/models', 'POST /api/loops/[tag]/change-sheets', 'POST /api/loops/[tag]/set-aside', 'DELETE /api/loops/[tag]/set-aside', 'POST /api/loops/[tag]/shelving', 'DELETE /api/loops/[tag]/shelving',
    'POST /api/tickets', 'POST /api/tickets/[id]/close', 'POST /api/digests', 'GET /api/verdicts',
    'POST /api/uploads', 'HEAD /api/uploads/[id]', 'PATCH /api/uploads/[id]', 'DELETE /api/uploads/[id]'),
  ...rows('engineer', ['import'], 'POST /api/imports', 'POST /api/imports/[id]/mapping', 'POST /api/loops/import'),
  // a machine follows the import that it sent
  ...rows('viewer', ['read', 'import'], 'GET /api/imports', 'GET /api/imports/[id]', 'GET /api/imports/[id]/events', 'GET /api/imports/[id]/rejects'),
  ...rows('admin', [],
    'GET /api/people', 'POST /api/people', 'PATCH /api/people/[id]', 'POST /api/people/[id]/invite', 'GET /api/tokens', 'POST /api/tokens', 'DELETE /api/tokens/[id]',
    'PATCH /api/settings', 'GET /api/audit', 'GET /api/mails', 'POST /api/mails/[id]/retry', 'GET /api/mails/caught', 'GET /api/mails/caught/[id]'),
]
