import withNuxt from './.nuxt/eslint.config.mjs'

/** Imports that a folder may not make, by what the path says; the sentence tells the rule of the house. */
const wall = (files, ...forbidden) => ({
  files,
  rules: { 'no-restricted-imports': ['error', { patterns: forbidden.map(([regex, message]) => ({ regex, message })) }] },
})
const server = ['(^|/)server(/|$)', 'What runs in the browser never imports the server.']
const db = ['(^|/)db(/|$)', 'Only the server and its jobs reach the database.']
const framework = ['^(vue|vue-router|pinia|nuxt|h3|knex|pg|pg-boss|zod|nodemailer|#imports|~)', 'The numerical core knows no framework.']
const node = ['^(node:|fs$|path$|crypto$)', 'The numerical core knows no file, clock or random source.']
const outside = (...own) => [`^\\.\\./(\\.\\./)*(?!${own.join('|')})(server|db|components|pages|stores|composables|tests|scripts)(/|$)`, 'The numerical core imports nothing of the application.']
const isDatabase = '/^(db|trx|database)$/'

export default withNuxt(
  { ignores: ['.data/**', '.build/**', '.output/**', 'fixtures/**', 'bench-results.json'] },
  {
    rules: {
      // A component of one word is named after its place in our own tree, never after an element.
      'vue/multi-word-component-names': 'off',
      // Layout of templates and of statements is left to the hand that writes them.
      'vue/max-attributes-per-line': 'off', 'vue/singleline-html-element-content-newline': 'off', 'vue/html-self-closing': 'off', 'vue/first-attribute-linebreak': 'off',
      'vue/html-indent': 'off', 'vue/html-closing-bracket-newline': 'off', 'vue/multiline-html-element-content-newline': 'off', 'vue/attributes-order': 'off',
      'vue/require-default-prop': 'off',
      '@typescript-eslint/no-unused-vars': ['error', { argsIgnorePattern: '^_', varsIgnorePattern: '^_', caughtErrorsIgnorePattern: '^_' }],
      '@typescript-eslint/unified-signatures': 'off', '@typescript-eslint/no-invalid-void-type': 'off',
      'no-empty': ['error', { allowEmptyCatch: false }],
    },
  },
  // A row as the database hands it over, and an answer as a test reads it, have no type of their own.
  { files: ['db/repositories/**', 'tests/**', 'bench/**', 'scripts/**'], rules: { '@typescript-eslint/no-explicit-any': 'off' } },
  wall(['shared/control/**'], framework, node, outside(), ['(^|/)assessment(/|$)', 'Control never imports assessment: the browser ships it alone.']),
  wall(['shared/assessment/**'], framework, node, outside()),
  wall(['shared/{schemas,types,format,ribbon,digest,tickets}/**'], server, db, ['(^|/)(components|pages|stores|composables)/', 'shared stands below both sides.']),
  wall(['pages/**', 'components/**', 'composables/**', 'stores/**', 'layouts/**', 'middleware/**', 'utils/**'], server, db),
  wall(['server/services/**', 'server/jobs/**', 'server/threads/**'], ['^(h3|#imports|nitropack)', 'Services and jobs know no HTTP: the worker runs them too.'], ['(^|/)(api|utils|routes|plugins)/', 'Services never import what stands above them.'],
    ['(^|/)(components|pages|stores|composables)/', 'The server never imports pages.']),
  wall(['db/**'], server, ['(^|/)(components|pages|stores|composables)/', 'The database layer knows no page.']),
  {
    files: ['server/**/*.ts', 'shared/**/*.ts'],
    rules: {
      'no-restricted-syntax': ['error',
        { selector: `CallExpression[callee.name=${isDatabase}][arguments.length>0]`, message: 'SQL is written in db/repositories only.' },
        { selector: `CallExpression[callee.object.name=${isDatabase}][callee.property.name=/^(raw|select|from|insert|with|schema)$/]`, message: 'SQL is written in db/repositories only.' },
      ],
    },
  },
  {
    files: ['shared/assessment/**', 'shared/control/**'],
    rules: {
      'no-restricted-properties': ['error', { object: 'Math', property: 'random', message: 'Seeds are passed in.' }, { object: 'Date', property: 'now', message: 'Clocks are passed in.' }],
    },
  },
)
