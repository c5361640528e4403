export const ROLES = ['viewer', 'technician', 'engineer', 'admin'] as const
export type Role = typeof ROLES[number]

/** Each role may do all that the ones before it may. */
export const atLeast = (role: Role, needed: Role): boolean => ROLES.indexOf(role) >= ROLES.indexOf(needed)

export interface Person { id: number, email: string, name: string, role: Role }
