export default defineNuxtConfig({
  modules: ['@pinia/nuxt', '@nuxtjs/tailwindcss', 'nuxt-auth-utils', '@nuxt/eslint'],
  // One page application: every page stands behind sign-in and lives on rows fetched for the person at hand, so
  // rendering it on the server first would fetch everything twice and gain no reader anything.
  ssr: false,
  srcDir: '.',
  devtools: { enabled: false },
  telemetry: false,
  css: ['@fontsource/inter/latin-400.css', '@fontsource/inter/latin-600.css', '~/assets/css/base.css'],
  ignore: ['.data/**', '.build/**', 'fixtures/**', 'tests/**', 'db/**', 'scripts/**', 'bench/**'],
  compatibilityDate: '2026-01-01',
  components: [{ path: '~/components', pathPrefix: false }],
  app: {
    head: {
      title: 'Fettle',
      htmlAttrs: { lang: 'en' },
      meta: [{ name: 'viewport', content: 'width=device-width, initial-scale=1, viewport-fit=cover' }],
      link: [{ rel: 'icon', type: 'image/svg+xml', href: '/icon.svg' }],
    },
  },
  // The session store asks /api/auth/me itself.
  auth: { loadStrategy: 'none' },
  tailwindcss: { cssPath: '~/assets/css/tailwind.css', viewer: false },
  nitro: {
    sourceMap: false,
    errorHandler: '~~/server/error.ts',
    esbuild: { options: { target: 'es2022' } },
    // The sealed cookie carries only the id of a row in `sessions`; see server/utils/session.ts.
    experimental: { asyncContext: false },
  },
  runtimeConfig: {
    // Secure unless the start command, which knows PUBLIC_URL, says that the site runs on plain http.
    session: { name: 'fettle-session', password: '', maxAge: 14 * 24 * 3600, sessionHeader: false as const, cookie: { sameSite: 'lax' as const, httpOnly: true, secure: true } },
  },
  typescript: { strict: true, tsConfig: { compilerOptions: { noUncheckedIndexedAccess: false, allowImportingTsExtensions: true } } },
  vite: { build: { chunkSizeWarningLimit: 1200 } },
})
