/** Makes the sample files anew: `node --import tsx sample-logs/make.ts`. The same bytes every time. */
import { mkdirSync, writeFileSync } from 'node:fs'
import { dirname, join } from 'node:path'
import { fileURLToPath } from 'node:url'
import type { Grid } from '../shared/grid.ts'
import { demoVehicles, flatbed, turboFour, type DemoVehicle } from './simulator/demo.ts'
import { simulate, toCsv, type SimulationInput } from './simulator/simulate.ts'

const tableText = (grid: Grid, values: ArrayLike<number>): string =>
  [
    ['kPa \\ rpm', ...grid.rpm].join(','),
    ...grid.mapKpa.map((map, row) => [map, ...grid.rpm.map((_, col) => values[row * grid.rpm.length + col])].join(',')),
  ].join('\r\n') + '\r\n'

const drive = (
  vehicle: DemoVehicle,
  rest: Pick<SimulationInput, 'habit' | 'seconds' | 'seed' | 'startC'> & Partial<SimulationInput>,
): string =>
  toCsv(
    simulate({
      engine: vehicle.engine,
      flashed: { grid: vehicle.grid, ve: vehicle.flashed },
      target: { grid: vehicle.grid, lambda: vehicle.target },
      rateHz: 10,
      ...rest,
    }),
  )

const slug = (vehicle: DemoVehicle): string => vehicle.name.toLowerCase().replaceAll(' ', '-')

/** File name to content. */
export function sampleFiles(): ReadonlyMap<string, string> {
  const files = new Map<string, string>()
  for (const vehicle of demoVehicles) {
    files.set(`${slug(vehicle)}-fuel-table.csv`, tableText(vehicle.grid, vehicle.flashed))
    files.set(`${slug(vehicle)}-target-table.csv`, tableText(vehicle.grid, vehicle.target))
  }
  files.set('flatbed-hills.csv', drive(flatbed, { habit: 'hills', seconds: 300, seed: 101, startC: 78, hunting: 120 }))
  files.set(
    'flatbed-cold-yard.csv',
    drive(flatbed, { habit: 'yard', seconds: 240, seed: 102, startC: 8, hunting: 140 }),
  )
  files.set(
    'flatbed-dead-intake-sensor.csv',
    drive(flatbed, { habit: 'road', seconds: 240, seed: 103, startC: 75, dead: 'iat' }),
  )
  files.set(
    'turbo-closed-loop.csv',
    drive(turboFour, { habit: 'road', seconds: 300, seed: 104, startC: 80, closedLoop: true }),
  )
  return files
}

if (process.argv[1] === fileURLToPath(import.meta.url)) {
  const folder = dirname(fileURLToPath(import.meta.url))
  mkdirSync(folder, { recursive: true })
  for (const [name, content] of sampleFiles()) writeFileSync(join(folder, name), content)
}
