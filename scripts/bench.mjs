// npm run bench [-- --quick] [-- --only reading,upload]: builds what changed, then measures. Results in bench-results.json.
import { spawn } from 'node:child_process'
import { buildWeb, buildWorker } from './lib/build.mjs'
import { root } from './lib/paths.mjs'

await buildWorker()
await buildWeb()
const child = spawn(process.execPath, ['--import', 'tsx', `${root}/bench/run.ts`, ...process.argv.slice(2)], { cwd: root, stdio: 'inherit' })
for (const signal of ['SIGINT', 'SIGTERM']) process.on(signal, () => child.kill(signal))
child.on('exit', code => process.exit(code ?? 1))
