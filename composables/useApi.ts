import { FetchError } from 'ofetch'

/** What a call was refused with: a sentence for the person, a word for the program. */
export class ApiFailure extends Error {
  constructor(message: string, readonly status: number, readonly code: string, readonly issues: { path: string, message: string }[] = [], readonly data: Record<string, unknown> = {}) {
    super(message)
    this.name = 'ApiFailure'
  }
}

export function toFailure(error: unknown): ApiFailure {
  if (error instanceof ApiFailure) return error
  if (error instanceof FetchError) {
    if (!error.response) return new ApiFailure('The server does not answer. Check the connection, then try again.', 0, 'offline')
    const body = error.data as { message?: string, data?: { code?: string, issues?: { path: string, message: string }[] } } | undefined
    const message = body?.message || (error.status === 503 ? 'The server is busy or its database is away; try again in a moment.' : `The server refused this (${error.status}).`)
    return new ApiFailure(message, error.status ?? 0, body?.data?.code ?? 'unknown', body?.data?.issues ?? [], body?.data ?? {})
  }
  return new ApiFailure(error instanceof Error ? error.message : 'Something went wrong here; reload the page.', 0, 'unknown')
}

type Query = Record<string, unknown>
interface Options { query?: Query, signal?: AbortSignal }

/** Calls of the API: the answer, or an ApiFailure. Somebody who is no longer signed in is sent to the sign-in page and back. */
export function useApi() {
  const router = useRouter()
  async function call<T>(method: 'GET' | 'POST' | 'PATCH' | 'PUT' | 'DELETE', url: string, options: Options & { body?: unknown } = {}): Promise<T> {
    try {
      return await $fetch<unknown>(url, { method, query: options.query, body: options.body as Record<string, unknown> | undefined, signal: options.signal, retry: 0 }) as T
    }
    catch (error) {
      if (options.signal?.aborted) throw error
      const failure = toFailure(error)
      const here = router.currentRoute.value
      if (failure.status === 401 && !here.path.startsWith('/sign-in')) await router.push({ path: '/sign-in', query: { next: here.fullPath } })
      throw failure
    }
  }
  return {
    get: <T>(url: string, query?: Query, signal?: AbortSignal) => call<T>('GET', url, { query, signal }),
    post: <T>(url: string, body?: unknown) => call<T>('POST', url, { body }),
    put: <T>(url: string, body?: unknown) => call<T>('PUT', url, { body }),
    patch: <T>(url: string, body?: unknown) => call<T>('PATCH', url, { body }),
    del: <T>(url: string) => call<T>('DELETE', url),
  }
}
