/**
 * A refusal of a use case. Services know no HTTP library; server/error.ts turns this into the one error body.
 * `data.code` is a word for the client, `message` a sentence for a person.
 */
export class Refusal extends Error {
  readonly statusCode: number
  readonly data: { code: string, [key: string]: unknown }
  constructor(statusCode: number, code: string, message: string, data: Record<string, unknown> = {}) {
    super(message)
    this.name = 'Refusal'
    this.statusCode = statusCode
    this.data = { code, ...data }
  }
}
