import { randomBytes } from 'node:crypto'
import { setResponseHeader } from 'h3'

/**
 * Headers that limit what a hole could do. Scripts run only from our own files or with the nonce of this very answer;
 * styles may stand inline, because the charts set them that way.
 */
export default defineNitroPlugin((nitro) => {
  const https = environment().PUBLIC_URL.startsWith('https:')
  const policy = (nonce: string) => [
    'default-src \'self\'', `script-src 'self'${nonce && ` 'nonce-${nonce}'`}`, 'style-src \'self\' \'unsafe-inline\'', 'img-src \'self\' data: blob:', 'font-src \'self\'',
    'connect-src \'self\'', 'worker-src \'self\'', 'object-src \'none\'', 'base-uri \'none\'', 'form-action \'self\'', 'frame-ancestors \'none\'',
  ].join('; ')

  nitro.hooks.hook('request', (event) => {
    setResponseHeader(event, 'X-Content-Type-Options', 'nosniff')
    setResponseHeader(event, 'X-Frame-Options', 'DENY')
    setResponseHeader(event, 'Referrer-Policy', 'same-origin')
    setResponseHeader(event, 'Cross-Origin-Opener-Policy', 'same-origin')
    setResponseHeader(event, 'Cross-Origin-Resource-Policy', 'same-origin')
    if (https) setResponseHeader(event, 'Strict-Transport-Security', 'max-age=31536000')
    if (event.path.startsWith('/api/')) setResponseHeader(event, 'Cache-Control', 'no-store')
    // the development server brings scripts and a socket of its own
    if (!import.meta.dev) setResponseHeader(event, 'Content-Security-Policy', policy(''))
  })
  nitro.hooks.hook('render:html', (html, { event }) => {
    if (import.meta.dev) return
    const nonce = randomBytes(16).toString('base64')
    for (const part of ['head', 'bodyPrepend', 'body', 'bodyAppend'] as const) html[part] = html[part].map(text => text.replace(/<script(?=[\s>])/g, `<script nonce="${nonce}"`))
    setResponseHeader(event, 'Content-Security-Policy', policy(nonce))
  })
})
