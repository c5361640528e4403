export const ROLES = ['viewer', 'technician', 'engineer', 'admin'] as const
export type Role = typeof ROLES[number]

/** Each role may do all that the ones before it may. */
export const atLeast = (role: Role, needed: Role): boolean => ROLES.indexOf(role) >= ROLES.indexOf(needed)

export interface Person { id: number, email: string, name: string, role: Role }

/** Who calls a route: a person, or a machine by its token. */
export interface Caller {
  /** null for a machine */
  userId: number | null
  tokenId: number | null
  name: string
  email: string
  role: Role
}
