/** Lets a reload without connection show what was seen last (public/sw.js). Browsers offer it only over https or on localhost. */
export default defineNuxtPlugin(() => {
  if (import.meta.dev || !('serviceWorker' in navigator)) return
  window.addEventListener('load', async () => {
    try {
      await navigator.serviceWorker.register('/sw.js')
      const { active } = await navigator.serviceWorker.ready
      const files = () => performance.getEntriesByType('resource').map(entry => entry.name).filter(name => name.includes('/_nuxt/'))
      active?.postMessage({ files: ['/', ...files()] })
      // pages that are opened later load more files; the ticket page matters most, so it is fetched ahead
      setTimeout(() => active?.postMessage({ files: files() }), 5000)
    }
    catch { /* a browser that refuses works as before, with a connection */ }
  })
})
