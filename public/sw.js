/**
 * Keeps the application and the tickets last seen on the device, so that a reload without connection shows them.
 * Everything is asked from the network first; only the files under /_nuxt/, whose names change with their content, are
 * taken from the device first. What belongs to a person goes when that person signs out.
 */
const SHELL = 'fettle-shell'
const SEEN = 'fettle-seen'
const MOST_FILES = 400

self.addEventListener('install', () => self.skipWaiting())
self.addEventListener('activate', event => event.waitUntil(self.clients.claim()))

const isSeen = path => path === '/api/auth/me' || path === '/api/weeks' || path === '/api/people/names' || path === '/api/areas' || path === '/api/tickets' || /^\/api\/tickets\/\d+$/.test(path)

self.addEventListener('fetch', (event) => {
  const { request } = event
  const url = new URL(request.url)
  if (url.origin !== self.location.origin) return
  if (request.method === 'POST' && url.pathname === '/api/auth/sign-out') event.waitUntil(caches.delete(SEEN))
  if (request.method !== 'GET') return
  if (request.mode === 'navigate' && !url.pathname.startsWith('/api/')) event.respondWith(networkFirst(SHELL, request, '/'))
  else if (url.pathname.startsWith('/_nuxt/')) event.respondWith(deviceFirst(request))
  else if (isSeen(url.pathname)) event.respondWith(networkFirst(SEEN, request, request.url))
})

self.addEventListener('message', (event) => {
  // what the page had loaded before this program was there
  if (event.data?.files) event.waitUntil(caches.open(SHELL).then(cache => Promise.all(event.data.files.map(async (file) => { if (!await cache.match(file)) await cache.add(file).catch(() => {}) }))))
})

async function networkFirst(name, request, key) {
  const cache = await caches.open(name)
  try {
    const answer = await fetch(request)
    if (answer.ok) {
      const headers = new Headers(answer.headers)
      headers.set('x-fettle-seen', new Date().toISOString())
      const copy = answer.clone()
      await cache.put(key, new Response(await copy.arrayBuffer(), { status: 200, headers }))
    }
    else if (answer.status === 401 || answer.status === 403 || answer.status === 404) await cache.delete(key)
    return answer
  }
  catch (error) {
    const kept = await cache.match(key)
    if (!kept) throw error
    const headers = new Headers(kept.headers)
    headers.set('x-fettle-offline', kept.headers.get('x-fettle-seen') ?? '')
    return new Response(await kept.arrayBuffer(), { status: 200, headers })
  }
}

async function deviceFirst(request) {
  const cache = await caches.open(SHELL)
  const kept = await cache.match(request)
  if (kept) return kept
  const answer = await fetch(request)
  if (answer.ok) {
    await cache.put(request, answer.clone())
    const keys = await cache.keys()
    for (const old of keys.slice(0, Math.max(0, keys.length - MOST_FILES))) if (new URL(old.url).pathname.startsWith('/_nuxt/')) await cache.delete(old)
  }
  return answer
}
