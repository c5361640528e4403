import { Refusal } from '../services/refusal'

/** Refuses as the services do; server/error.ts makes the one error body of it. */
export const refusal = (...what: ConstructorParameters<typeof Refusal>): Refusal => new Refusal(...what)

export const notFound = (what: string): Refusal => refusal(404, 'not_found', `${what} was not found, or is not yours to see.`)
