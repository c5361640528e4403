import { getHeader } from 'h3'

/**
 * Against forged requests from other sites: a browser names the page that a changing request comes from, and that has
 * to be ours. Programs without a browser name none; they hold no other site's cookie.
 */
export default defineEventHandler((event) => {
  if (['GET', 'HEAD', 'OPTIONS'].includes(event.method)) return
  if (getHeader(event, 'authorization')?.startsWith('Bearer ')) return
  if (getHeader(event, 'sec-fetch-site') === 'same-origin') return
  const origin = getHeader(event, 'origin')
  if (!origin) return
  const own = [new URL(environment().PUBLIC_URL).host, getHeader(event, 'host')]
  const host = URL.canParse(origin) ? new URL(origin).host : null
  if (host === null || !own.includes(host)) throw refusal(403, 'foreign_origin', 'This request came from a page of another site and was refused.')
})
