/** The benchmark: how near the learner comes to the simulator's truth beside the hand methods, and how fast logs are read. */
import { mkdirSync, writeFileSync } from 'node:fs'
import Papa from 'papaparse'
import { demoVehicles, driveAgain, type DemoDrive, type DemoVehicle } from '../../sample-logs/simulator/demo.ts'
import { toCsv, type SimulatedLog } from '../../sample-logs/simulator/simulate.ts'
import { createLogReader } from '../../server/core/csv/read-log.ts'
import type { Drive } from '../../server/core/drive.ts'
import { learn } from '../../server/core/learn.ts'
import { cornerAt } from '../../shared/grid.ts'
import { factorInPlace, solveInto } from '../../server/core/fit/cholesky.ts'

interface Row {
  readonly group: string
  readonly name: string
  readonly value: number
  readonly unit: string
  readonly bar: number | null
  readonly stretch: number | null
  readonly peer: string | null
  readonly ok: boolean | null
}
const rows: Row[] = []
const add = (row: Partial<Row> & Pick<Row, 'group' | 'name' | 'value' | 'unit'>) =>
  rows.push({ bar: null, stretch: null, peer: null, ok: null, ...row })

function driveOf(log: SimulatedLog, vehicle: DemoVehicle, id: string): Drive {
  const column = (title: string) => Float64Array.from(log[title] ?? [])
  const multiplier = (title: string) => column(title).map((percent) => 1 + percent / 100)
  return {
    id,
    timeS: column('Time (s)'),
    rpm: column('Engine speed (rpm)'),
    mapKpa: column('MAP (kPa)'),
    lambda: column('Lambda'),
    iatC: column('IAT (°C)'),
    ectC: column('ECT (°C)'),
    tpPct: column('TP (%)'),
    trim: multiplier('Closed loop trim (%)'),
    warmup: multiplier('Warm-up (%)'),
    afterStart: multiplier('After-start (%)'),
    accel: multiplier('Acceleration (%)'),
    pulseWidthMs: column('Pulse width (ms)'),
    targetLambda: column('Target lambda'),
    flashed: { grid: vehicle.grid, ve: vehicle.flashed },
    target: { grid: vehicle.grid, lambda: vehicle.target },
  }
}

/** The grid's least-squares best representation of the true surface where the engine ran: what a perfect learner gives. */
function bestGrid(vehicle: DemoVehicle, drives: readonly Drive[]): Float64Array {
  const { grid, engine } = vehicle
  const n = grid.rpm.length * grid.mapKpa.length
  const a = new Float64Array(n * n)
  const b = new Float64Array(n)
  for (let i = 0; i < n; i += 1) {
    const ve = engine.trueVe(grid.rpm[i % grid.rpm.length]!, grid.mapKpa[Math.floor(i / grid.rpm.length)]!)
    // A whisper of the nodes themselves, so that cells nobody visited have an answer.
    a[i * n + i] = 1e-3
    b[i] = 1e-3 * ve
  }
  for (const drive of drives) {
    for (let i = 0; i < drive.timeS.length; i += 1) {
      if (drive.rpm[i]! < 300) continue
      const { cells, weights } = cornerAt(grid, drive.rpm[i]!, drive.mapKpa[i]!)
      const ve = engine.trueVe(drive.rpm[i]!, drive.mapKpa[i]!)
      for (let p = 0; p < 4; p += 1) {
        b[cells[p]!]! += weights[p]! * ve
        for (let q = 0; q < 4; q += 1) a[cells[p]! * n + cells[q]!]! += weights[p]! * weights[q]!
      }
    }
  }
  if (!factorInPlace(a, n)) throw new Error('the reference grid cannot be solved')
  solveInto(b, a, n)
  return b
}

const scenario = (seed: number, habit: DemoDrive['habit'], seconds: number): DemoDrive => ({
  title: `${habit} ${seed}`,
  note: '',
  recordedOn: '2026-01-01',
  habit,
  seconds,
  seed,
  startC: 75,
})
const median = (values: readonly number[]): number => values.toSorted((x, y) => x - y)[values.length >> 1]!

function accuracy(): void {
  const ratiosA: number[] = []
  const ratiosC: number[] = []
  const all: { rms: number; worst: number; covered: number }[] = []
  console.log('\naccuracy: RMS error in % of visited cells (at least 1 s of evidence) against the grid’s best table')
  console.log(
    'scenario'.padEnd(34),
    ['base', 'nearest', 'bilinear', 'learned', 'worst', '2 sd %'].map((word) => word.padStart(9)).join(''),
  )
  for (const vehicle of demoVehicles) {
    const scenarios = [
      scenario(31, 'road', 1200),
      scenario(32, 'hills', 1200),
      scenario(33, 'hills', 1200),
      scenario(34, 'track', 1200),
    ]
    for (const each of scenarios) {
      const drives = [driveOf(driveAgain(vehicle, each), vehicle, each.title)]
      const result = learn({
        drives,
        engine: {
          displacementL: vehicle.sheet.displacementL,
          cylinders: vehicle.sheet.cylinders,
          boosted: vehicle.sheet.boosted,
          lambdaRange: { low: vehicle.sheet.lambdaLow, high: vehicle.sheet.lambdaHigh },
          revLimitRpm: vehicle.sheet.revLimitRpm,
          stoichAfr: vehicle.sheet.stoichAfr,
        },
        grid: vehicle.grid,
        current: vehicle.flashed,
        settings: { stepCapPct: 50 },
      })
      const name = `${vehicle.name}, ${each.title}`
      if (!result.ok) {
        console.log(name.padEnd(34), result.detail)
        add({ group: 'accuracy', name, value: Number.NaN, unit: '%', ok: false })
        continue
      }
      const { fitted, sigmaPct, evidenceS, handNearest, handBilinear } = result.proposal
      const truth = bestGrid(vehicle, drives)
      const visited = [...evidenceS.keys()].filter((cell) => evidenceS[cell]! >= 1)
      const error = (values: Float64Array) =>
        visited.map((cell) => 100 * (values[cell]! / truth[cell]! - 1)).filter((value) => Number.isFinite(value))
      const rms = (values: Float64Array) =>
        Math.sqrt(error(values).reduce((sum, value) => sum + value * value, 0) / error(values).length)
      const worst = Math.max(...error(fitted).map(Math.abs))
      const covered =
        (100 *
          visited.filter((cell) => Math.abs(100 * Math.log(fitted[cell]! / truth[cell]!)) <= 2 * sigmaPct[cell]!)
            .length) /
        visited.length
      const line = [rms(vehicle.flashed), rms(handNearest), rms(handBilinear), rms(fitted), worst, covered]
      console.log(name.padEnd(34), line.map((value) => value.toFixed(2).padStart(9)).join(''))
      ratiosA.push(line[3]! / line[1]!)
      ratiosC.push(line[3]! / line[2]!)
      all.push({ rms: line[3]!, worst, covered })
      add({
        group: 'accuracy',
        name: `${name}, learned`,
        value: line[3]!,
        unit: '% RMS',
        bar: 1.5,
        peer: `nearest ${line[1]!.toFixed(2)}, bilinear ${line[2]!.toFixed(2)}`,
        ok: line[3]! <= 1.5,
      })
    }
  }
  const judge = (name: string, value: number, unit: string, bar: number, ok: boolean) => {
    console.log(`${name}: ${value.toFixed(2)} ${unit} (bar ${bar}) ${ok ? 'met' : 'NOT MET'}`)
    add({ group: 'accuracy', name, value, unit, bar, ok })
  }
  const rms = median(all.map((each) => each.rms))
  judge('median RMS', rms, '%', 1, rms <= 1)
  const worst = median(all.map((each) => each.worst))
  judge('median worst cell', worst, '%', 3, worst <= 3)
  judge('median ratio to the nearest-cell average', median(ratiosA), '', 0.2, median(ratiosA) <= 0.2)
  judge('median ratio to the bilinear average', median(ratiosC), '', 0.4, median(ratiosC) <= 0.4)
  const covered = all.reduce((sum, each) => sum + each.covered, 0) / all.length
  judge('mean 2-sigma coverage', covered, '%', 90, covered >= 90 && covered <= 98)
}

/** Median seconds of a few runs. */
function timed(work: () => void, runs = 3): number {
  const times = Array.from({ length: runs }, () => {
    const start = performance.now()
    work()
    return (performance.now() - start) / 1000
  })
  return median(times)
}

function ingest(): void {
  const vehicle = demoVehicles[0]!
  const text = toCsv(driveAgain(vehicle, { ...scenario(41, 'road', 3000) }))
  const bytes = new TextEncoder().encode(text)
  const ours = timed(() => {
    const reader = createLogReader()
    for (let at = 0; at < bytes.length; at += 1 << 20) reader.push(bytes.subarray(at, at + (1 << 20)))
    const read = reader.end()
    if (!read.ok) throw new Error(read.detail)
  })
  const lines = timed(() => {
    let count = 0
    for (let i = 0; i < bytes.length; i += 1) if (bytes[i] === 10) count += 1
    if (count === 0) throw new Error('no lines')
  })
  const papa = timed(() => {
    Papa.parse(text, { header: true, dynamicTyping: true })
  }, 2)
  console.log(
    `\ningest: ${(bytes.length / 1e6).toFixed(1)} MB, 15 columns, ${(bytes.length / 1e6 / ours).toFixed(0)} MB a second`,
  )
  const report = (name: string, value: number, bar: number, stretch: number, peer: string) => {
    console.log(`${name}: ${value.toFixed(2)} (bar ${bar}, stretch ${stretch}) ${value >= bar ? 'met' : 'NOT MET'}`)
    add({ group: 'ingest', name, value, unit: 'ratio', bar, stretch, peer, ok: value >= bar })
  }
  report('speed against a loop that only counts newlines', lines / ours, 0.3, 0.75, 'JavaScript byte loop')
  report('times faster than papaparse with header and dynamicTyping', papa / ours, 20, 45, 'papaparse')
  for (const peer of ['pandas read_csv', 'numpy, scipy sums and solves']) {
    console.log(`against ${peer}: not measured`)
    add({ group: 'ingest', name: `against ${peer}`, value: Number.NaN, unit: 'not measured', peer })
  }
}

const groups: Record<string, () => void> = { accuracy, ingest }
const wanted = process.argv.slice(2)
for (const [name, run] of Object.entries(groups)) if (wanted.length === 0 || wanted.includes(name)) run()
mkdirSync('.data', { recursive: true })
writeFileSync('.data/bench.json', JSON.stringify(rows, null, 2))
