import { existsSync, mkdirSync, readFileSync, rmSync } from 'node:fs'
import { buildWeb, buildWorker } from './lib/build.mjs'
import { startScratchCluster } from './lib/cluster.mjs'
import { ensureDebianPackages } from './lib/debianPackages.mjs'
import { ensureNodePackages } from './lib/nodePackages.mjs'
import { built, root } from './lib/paths.mjs'
import { run } from './lib/run.mjs'
import { command, say } from './lib/say.mjs'

/**
 * `npm test` runs everything; `npm test -- tests/control` only the tests under that path, without the checks of the
 * whole tree. The last line is the sum over all of it.
 */
const only = process.argv.slice(2)
let passed = 0
let failed = 0

/** A check that is not a test file counts as one test. */
async function check(name, work) {
  const started = Date.now()
  let problem = null
  try {
    const result = await work()
    if (result && result.code !== 0) problem = result.output
  }
  catch (error) { problem = error.message }
  const seconds = Math.round((Date.now() - started) / 1000)
  if (problem === null) { passed++; say(`ok    ${name} (${seconds} s)`) }
  else { failed++; say(`FAIL  ${name} (${seconds} s)\n${problem.trim()}\n`) }
}

const tool = (name, ...args) => run(`${root}/node_modules/.bin/${name}`, args, { cwd: root, quiet: true })

await command(async () => {
  await ensureNodePackages()
  await ensureDebianPackages(['postgresql', 'chromium'])
  if (!only.length) {
    await check('lint', () => tool('eslint', '.'))
    await check('dead code', () => tool('knip', '--no-progress', '--no-config-hints'))
    await check('types of the core', () => tool('tsc', '--noEmit', '-p', 'tsconfig.check.json'))
    await check('types of the application', () => tool('nuxi', 'typecheck'))
  }
  const needsBuild = !only.length || only.some(path => /api|browser|faults|^tests\/?$/.test(path))
  if (needsBuild) {
    await check('build', async () => {
      await buildWorker()
      await buildWeb()
    })
  }
  // Suites that need it check the build themselves; after this one they need not hash the sources again.
  const cluster = await startScratchCluster()
  const report = `${built}/test-results.json`
  mkdirSync(built, { recursive: true })
  rmSync(report, { force: true })
  try {
    const { code } = await run(`${root}/node_modules/.bin/vitest`, ['run', '--reporter=default', '--reporter=json', `--outputFile.json=${report}`, ...only], {
      cwd: root, env: { ...process.env, CI: '1', FETTLE_TEST_CLUSTER: cluster.url('postgres'), ...(needsBuild && !failed ? { FETTLE_BUILT: '1' } : {}) },
    })
    const result = existsSync(report) ? JSON.parse(readFileSync(report, 'utf8')) : null
    const before = failed
    passed += result?.numPassedTests ?? 0
    failed += result?.numFailedTests ?? 0
    // a file that could not even be read has no tests to fail
    failed += result?.testResults.filter(file => file.status === 'failed' && !file.assertionResults.some(test => test.status === 'failed')).length ?? 0
    if (code !== 0 && failed === before) failed++
  }
  finally { await cluster.stop() }
  say(`${passed} passed, ${failed} failed`)
  return failed || !passed ? 1 : 0
})
process.exit()
