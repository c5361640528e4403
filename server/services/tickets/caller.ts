import type { Role } from '../../../shared/types/people'

/** Who acts, as the services need it. */
export interface Actor { userId: number | null, name: string, role: Role }
