/** What each effect of the simulator costs the learner: the same drives with one taken away at a time. No bars. */
import type { SimulatedEngine } from '../../sample-logs/simulator/engine.ts'
import { undisturbed, type Disturbances } from '../../sample-logs/simulator/simulate.ts'
import { learn } from '../../server/core/learn.ts'
import { openCap } from './accuracy.ts'
import { mean, note, progress, rms } from './report.ts'
import { driveScenario, scenarios, type Scenario } from './scenarios.ts'
import { bestTable, errorsPct } from './truth.ts'

interface Without {
  readonly name: string
  readonly disturbances?: Partial<Disturbances>
  readonly engine?: (engine: SimulatedEngine) => Partial<SimulatedEngine>
}

const noFilm = () => ({ film: { share: 0, tauS: 1 } })
const noWay = (engine: SimulatedEngine) => ({
  transport: { t0S: 0, massKg: 0 },
  sensor: { ...engine.sensor, lagS: 0 },
})
const variants: readonly Without[] = [
  { name: 'as it is' },
  { name: 'without the level of the drive', disturbances: { levelSd: 0 } },
  { name: 'without drift', disturbances: { drift: undisturbed.drift } },
  { name: 'without level and drift', disturbances: { levelSd: 0, drift: undisturbed.drift } },
  { name: 'without strokes and noise of the pressure', disturbances: { pulsationKpa: 0, mapSdKpa: 0 } },
  { name: 'without noise of the wideband', disturbances: { lambdaSd: 0 } },
  { name: 'without places', disturbances: { isQuantised: false } },
  { name: 'without film', engine: noFilm },
  { name: 'without transport and lag', engine: noWay },
  { name: 'without any disturbance', disturbances: undisturbed },
]

const chosen = ['six, rich, hills', 'turbo, rich, track', 'eight, lean, 10 Hz']
const drives: readonly Scenario[] = scenarios
  .filter(({ name }) => chosen.includes(name))
  .flatMap((scenario) => [3000, 4000].map((more) => ({ ...scenario, seed: scenario.seed + more })))

/** RMS of the visited cells, %. */
function errorWithout(scenario: Scenario, { disturbances, engine }: Without): number {
  const plant = { ...scenario.plant, engine: { ...scenario.plant.engine, ...engine?.(scenario.plant.engine) } }
  const drive = driveScenario({ ...scenario, plant, ...(disturbances ? { disturbances } : {}) })
  const { facts, grid, start } = plant
  const result = learn({ drives: [drive], engine: facts, grid, current: start, settings: openCap })
  if (!result.ok) throw new Error(`${scenario.name}: ${result.detail}`)
  const { fitted, evidenceS } = result.proposal
  const visited = [...evidenceS.keys()].filter((cell) => evidenceS[cell]! >= 1)
  return rms(errorsPct(fitted, bestTable(plant, [drive]), visited))
}

export function effects(): void {
  const group = 'effects'
  console.log(`\neffects: RMS of visited cells, mean of ${drives.length} drives`)
  for (const variant of variants) {
    const errors = drives.map((scenario) => {
      progress(`${variant.name}: ${scenario.name}`)
      return errorWithout(scenario, variant)
    })
    progress('')
    note({ group, name: variant.name, value: mean(errors), unit: '%' })
  }
}
