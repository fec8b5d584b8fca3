/** How long learning takes, and its parts beside NumPy and SciPy in the same run. */
import { spawnSync } from 'node:child_process'
import { fileURLToPath } from 'node:url'
import { z } from 'zod'
import { seeded } from '../../sample-logs/simulator/random.ts'
import { factorInPlace, inverseDiagonal, solveInto } from '../../server/core/fit/cholesky.ts'
import { knotsFor, sumUp } from '../../server/core/fit/normal.ts'
import { priorOf, priorParts } from '../../server/core/fit/prior.ts'
import { learn, learnFrom } from '../../server/core/learn.ts'
import { rememberLog, type LogMemory } from '../../server/core/log-memory.ts'
import { burnWith, emptyPrediction, predictInto } from '../../server/core/model/forward.ts'
import { instantPath } from '../../server/core/model/path.ts'
import { prepare } from '../../server/core/model/prepare.ts'
import { valueAt, type Grid } from '../../shared/grid.ts'
import { openCap } from './accuracy.ts'
import { judge, note, notMeasured, timed } from './report.ts'
import { driveScenario, plants, type Plant, type Scenario } from './scenarios.ts'

const Peer = z.record(z.string(), z.number())

/** NumPy's and SciPy's seconds, or null where Debian's packages are not installed. */
function pythonPeers(): Record<string, number> | null {
  const script = fileURLToPath(new URL('./peers.py', import.meta.url))
  const one = { ...process.env, OPENBLAS_NUM_THREADS: '1', OMP_NUM_THREADS: '1' }
  const run = spawnSync('/usr/bin/python3', [script], { encoding: 'utf8', env: one })
  return run.status === 0 ? Peer.parse(JSON.parse(run.stdout)) : null
}

const sixteen: Grid = {
  rpm: Array.from({ length: 16 }, (_, i) => 600 + i * 333),
  mapKpa: Array.from({ length: 16 }, (_, i) => 25 + i * 5.2),
}

/** The six on a table of 16 × 16. */
function largePlant(): Plant {
  const { richSix } = plants
  const resample = (values: Float64Array) =>
    Float64Array.from({ length: 256 }, (_, cell) =>
      valueAt(richSix.grid, values, sixteen.rpm[cell % 16]!, sixteen.mapKpa[Math.floor(cell / 16)]!),
    )
  return { ...richSix, grid: sixteen, start: resample(richSix.start), target: resample(richSix.target) }
}

const scenario = (plant: Plant, seconds: number, rateHz: number, seed: number): Scenario => ({
  name: 'speed',
  plant,
  habit: 'hills',
  seconds,
  rateHz,
  seed,
  startC: 74,
})

function randomSystem(n: number): { a: Float64Array; b: Float64Array } {
  const random = seeded(3)
  const a = new Float64Array(n * n)
  for (let row = 0; row < n; row += 1) {
    for (let col = 0; col <= row; col += 1) a[row * n + col] = random.normal()
    a[row * n + row] = 4 * n
  }
  return { a, b: Float64Array.from({ length: n }, () => random.normal()) }
}

export function speed(): void {
  const group = 'speed'
  console.log('\nspeed')
  const small = plants.richSix
  const twenty = driveScenario(scenario(small, 1200, 20, 401))
  const learnTwenty = timed(() =>
    learn({ drives: [twenty], engine: small.facts, grid: small.grid, current: small.start, settings: openCap }),
  )
  note({ group, name: 'learn 20 min at 20 Hz, 144 cells', value: learnTwenty, unit: 's' })

  const large = largePlant()
  const hour = driveScenario(scenario(large, 3600, 50, 402))
  const learnHour = timed(
    () => learn({ drives: [hour], engine: large.facts, grid: large.grid, current: large.start, settings: openCap }),
    2,
  )
  judge(group, 'learn 1 h at 50 Hz, 256 cells', learnHour, 's', { atMost: 4, stretch: 1.5 })

  const parts = priorParts(large.grid)
  const memories = [403, 404, 405, 406, 407].map((seed): LogMemory => {
    const found = rememberLog(driveScenario(scenario(large, 600, 20, seed)), large.facts, large.grid, parts)
    if (!found.ok) throw new Error(found.detail)
    return { ...found.memory, driveId: String(seed) }
  })
  const ground = { engine: large.facts, grid: large.grid, current: large.start, settings: openCap }
  const adding = timed(() => learnFrom(memories, ground, parts))
  judge(group, 'five remembered logs added up, 256 cells', 1000 * adding, 'ms', { atMost: 300, stretch: 100 })

  const peers = pythonPeers()
  const against = (name: string, ours: number, key: string, peer: string, atLeast: number, stretch?: number) =>
    peers
      ? judge(group, `${name} (${(1000 * ours).toFixed(1)} ms)`, peers[key]! / ours, 'times faster', {
          atLeast,
          peer,
          ...(stretch === undefined ? {} : { stretch }),
        })
      : notMeasured(group, name, peer)
  const wide = driveScenario(scenario(large, 3600, 100, 408))
  const prepared = prepare(wide, large.facts, large.grid)
  const burn = burnWith(prepared, large.start, large.facts.stoichAfr)
  const prediction = predictInto(emptyPrediction(prepared.n), prepared, burn, instantPath)
  const ones = new Float64Array(prepared.n).fill(1)
  const knots = knotsFor(prepared.timeS, 10)
  const sums = timed(() => sumUp(prepared, burn, prediction, large.start, instantPath, knots, ones, ones))
  against(
    'normal equations of 360,000 samples, with drift knots',
    sums,
    'normal',
    'NumPy bincount, without drift',
    4,
    6,
  )
  for (const [side, solveBar] of [
    [16, 2],
    [32, 5],
  ] as const) {
    const n = side * side
    const banded = tableSystem(side)
    against(
      `solve of a table's banded system, ${n} cells`,
      timed(() => solved(banded), 5),
      `solve${n}`,
      'numpy.linalg.solve',
      solveBar,
    )
    const dense = randomSystem(n)
    const solve = timed(() => solved(dense), 5)
    const l = solved(dense)
    const all = timed(() => inverseDiagonal(l, n), 3) + solve
    note({
      group,
      name: `dense solve, ${n} cells`,
      value: peers ? peers[`solve${n}`]! / solve : Number.NaN,
      unit: 'times as fast',
      peer: 'numpy.linalg.solve',
    })
    against(`exact variances, dense, ${n} cells`, all, `variances${n}`, 'SciPy dpotri', 4, 6)
  }
}

/** What the prior and scattered readings make of a table without drift: nothing lies further than two rows from the diagonal. */
function tableSystem(side: number): { a: Float64Array; b: Float64Array } {
  const grid = {
    rpm: Array.from({ length: side }, (_, i) => 600 + i * 170),
    mapKpa: Array.from({ length: side }, (_, i) => 25 + i * 2.6),
  }
  const { precision, pull } = priorOf(priorParts(grid), new Float64Array(side * side).fill(4.3), {
    curvature: 1,
    gradient: 1,
  })
  return { a: precision, b: pull }
}

function solved({ a, b }: { a: Float64Array; b: Float64Array }): Float64Array {
  const n = b.length
  const l = a.slice()
  if (!factorInPlace(l, n)) throw new Error('not positive definite')
  solveInto(b.slice(), l, n)
  return l
}
