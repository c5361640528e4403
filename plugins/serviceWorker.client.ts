/** Lets a reload without connection show what was seen last (public/sw.js). Browsers offer it only over https or on localhost. */
export default defineNuxtPlugin(() => {
  if (import.meta.dev || !('serviceWorker' in navigator)) return
  const begin = async () => {
    try {
      await navigator.serviceWorker.register('/sw.js')
      const { active } = await navigator.serviceWorker.ready
      const files = () => performance.getEntriesByType('resource').map(entry => entry.name).filter(name => name.includes('/_nuxt/'))
      active?.postMessage({ files: ['/', ...files()] })
      // what the page loads in its first seconds, before the program has taken over
      setTimeout(() => active?.postMessage({ files: files() }), 5000)
    }
    catch { /* a browser that refuses works as before, with a connection */ }
  }
  // by the time plugins run, the event may be over
  if (document.readyState === 'complete') void begin()
  else window.addEventListener('load', begin, { once: true })
})
