import { execFileSync } from 'node:child_process'
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { autocorrelation } from '../shared/assessment/statistics/autocorrelation'
import { autoregressiveLeastSquares } from '../shared/assessment/statistics/autoregressiveLeastSquares'
import { deviations } from '../shared/assessment/statistics/deviations'
import { seededRandom } from '../shared/assessment/statistics/seededRandom'
import { variance } from '../shared/assessment/statistics/variance'
import { welchSpectrum } from '../shared/assessment/spectrum/welchSpectrum'
import { alternate, median, report } from './harness'

function measures(sp: Float64Array, pv: Float64Array, op: Float64Array): Record<string, number> {
  const n = pv.length
  const e = new Float64Array(n)
  let iae = 0
  let sum = 0
  let inside = 0
  let travel = 0
  let saturated = 0
  for (let i = 0; i < n; i++) {
    const v = e[i] = sp[i] - pv[i]
    const size = Math.abs(v)
    iae += size
    sum += v
    if (size <= 1) inside++
    if (i > 0) travel += Math.abs(op[i] - op[i - 1])
    if (op[i] <= 0.5 || op[i] >= 99.5) saturated++
  }
  const d = deviations(e, 'e')
  const r = autocorrelation(d, 2000)
  const model = autoregressiveLeastSquares(d, { maxOrder: 30 })
  const { power, frequencyHz } = welchSpectrum(d, { sampleIntervalS: 10, segmentLength: 2048 })
  let top = 0
  for (let i = 0; i < power.length; i++) if (power[i] > power[top]) top = i
  return {
    iae: iae / n, offset: sum / n, deviation: Math.sqrt(variance(pv)), inTolerance: inside / n, travel, saturated: saturated / n,
    r1: r[1], r2000: r[2000], innovation: model.innovationVariance, peak: power[top], peakAt: frequencyHz[top],
  }
}

/** The core measures of a loop-week (60,480 samples) against numpy and scipy: same figures, checked, both warm, one thread. */
export async function numerics(times: number): Promise<void> {
  const n = 60_480
  const random = seededRandom(8)
  let slow = 0
  const sp = Float64Array.from({ length: n }, (_, i) => i > 30_000 ? 52 : 50)
  const pv = Float64Array.from({ length: n }, (_, i) => sp[i] + Math.sin(i / 12) + (slow = 0.9 * slow + 0.3 * random.normal()))
  const op = Float64Array.from({ length: n }, (_, i) => 50 - 2 * (pv[i] - sp[i]))
  const folder = mkdtempSync(join(tmpdir(), 'fettle-numerics-'))
  try {
    const path = join(folder, 'x.f64')
    writeFileSync(path, Buffer.concat([sp, pv, op].map(x => Buffer.from(x.buffer))))
    let ours: Record<string, number> = {}
    let theirs: Record<string, number> = {}
    // warm is what comes after the compiler's last look, some dozens of passes; numpy has nothing to compile
    for (let i = 0; i < 60; i++) measures(sp, pv, op)
    const first = () => {
      const all: number[] = []
      for (let i = 0; i < 5; i++) {
        const started = performance.now()
        ours = measures(sp, pv, op)
        all.push(performance.now() - started)
      }
      return median(all)
    }
    const second = () => {
      const answer = JSON.parse(execFileSync('python3', [join(import.meta.dirname, 'numerics.py'), path, '5'], { env: { ...process.env, OMP_NUM_THREADS: '1', OPENBLAS_NUM_THREADS: '1' } }).toString())
      theirs = answer.result
      return answer.ms as number
    }
    const [a, b] = await alternate(times, first, second)
    const worst = Math.max(...Object.keys(theirs).map(key => Math.abs(ours[key] - theirs[key]) / Math.max(1e-9, Math.abs(theirs[key]))))
    report('core measures of a loop-week', b / a, `error measures, autocorrelation to lag 2,000, autoregression to order 30, spectrum: ${a.toFixed(1)} ms against numpy and scipy ${b.toFixed(1)} ms; largest relative difference ${worst.toExponential(0)}`, { least: 1.5 }, { ours: a, theirs: b, worst })
  }
  catch (error) {
    if ((error as NodeJS.ErrnoException).code !== 'ENOENT' && !/No module named/.test(String((error as { stderr?: Buffer }).stderr))) throw error
    console.log('core measures of a loop-week: not measured, because python3 with numpy and scipy is not there')
  }
  finally { rmSync(folder, { recursive: true, force: true }) }
}
