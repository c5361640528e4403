const compilerOptions = { noUncheckedIndexedAccess: false, allowImportingTsExtensions: true }

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
    typescript: { tsConfig: { compilerOptions } },
    errorHandler: '~~/server/error.ts',
    esbuild: { options: { target: 'es2022' } },
    // The sealed cookie carries only the id of a row in `sessions`; see server/utils/session.ts.
    experimental: { asyncContext: false },
  },
  runtimeConfig: {
    // Secure unless the start command, which knows PUBLIC_URL, says that the site runs on plain http.
    session: { name: 'fettle-session', password: '', maxAge: 14 * 24 * 3600, sessionHeader: false as const, cookie: { sameSite: 'lax' as const, httpOnly: true, secure: true } },
  },
  // Nuxt makes a configuration for each of four places; our rule on indexed access holds in all of them.
  typescript: { strict: true, tsConfig: { compilerOptions }, nodeTsConfig: { compilerOptions }, sharedTsConfig: { compilerOptions } },
  hooks: {
    // Nuxt 4.4.5 looks for a server entry in the client's configuration when ssr is off, and the development server
    // stops without one; the client's own entry satisfies it and is never rendered on the server.
    'vite:extendConfig'(config, { isClient }) {
      const input = config.build?.rollupOptions?.input
      if (isClient && process.env.NODE_ENV !== 'production' && typeof input === 'object' && !Array.isArray(input)) input.server ??= input.entry
    },
  },
  vite: { build: { chunkSizeWarningLimit: 1200 } },
})
