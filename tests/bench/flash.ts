/** Flash and drive, five times: does the table come right at once, and does it stay right? */
import type { Drive } from '../../server/core/drive.ts'
import { cornerAt, valueAt } from '../../shared/grid.ts'
import { prepare, Role } from '../../server/core/model/prepare.ts'
import { learn, type Learned } from '../../server/core/learn.ts'
import { openCap } from './accuracy.ts'
import { kalman } from './peers.ts'
import { judge, note, progress, rms } from './report.ts'
import { driveScenario, plants, type Plant, type Scenario } from './scenarios.ts'
import { bestTable, errorsPct } from './truth.ts'

const flashes = 5
const runs: readonly { readonly name: string; readonly plant: Plant; readonly habit: Scenario['habit'] }[] = [
  { name: 'six', plant: plants.richSix, habit: 'hills' },
  { name: 'turbo', plant: plants.richTurbo, habit: 'hills' },
  { name: 'eight', plant: plants.leanEight, habit: 'track' },
]

type Method = (drives: readonly Drive[], plant: Plant, current: Float64Array) => Learned

const withMemory: Method = (drives, plant, current) => {
  const result = learn({ drives, engine: plant.facts, grid: plant.grid, current, settings: openCap })
  if (!result.ok) throw new Error(result.detail)
  return result.proposal
}

/** Every cell with evidence takes the answer. */
const flashed = (current: Float64Array, answer: Float64Array, known: Uint8Array): Float64Array =>
  current.map((value, cell) => (known[cell] && Number.isFinite(answer[cell]) ? answer[cell]! : value))

interface Step {
  readonly rms: number
  readonly worst: number
  readonly lambdaRms: number
  readonly within2: number
}

/** What a method puts into the cells, from the learner's proposal or from the drive and the table it drove with. */
type Answer = (proposal: Learned, drive: Drive, table: Float64Array) => Float64Array

function play(name: string, plant: Plant, habit: Scenario['habit'], answerOf: Answer, remembers: boolean): Step[] {
  let table: Float64Array = plant.start.slice()
  let drives: readonly Drive[] = []
  const steps: Step[] = []
  for (let flash = 1; flash <= flashes; flash += 1) {
    progress(`${name}, flash ${flash} of ${flashes}`)
    const scenario = { name, plant, habit, seconds: 900, rateHz: 20, seed: 200 + 10 * flash, startC: 74 }
    const drive = { ...driveScenario(scenario, table), number: flash }
    drives = [...drives, drive]
    const proposal = withMemory(remembers ? drives : [drive], plant, table)
    table = flashed(table, answerOf(proposal, drive, table), proposal.hasEvidence)
    const known = [...proposal.evidenceS.keys()].filter((cell) => proposal.evidenceS[cell]! >= 1)
    const errors = errorsPct(table, bestTable(plant, drives), known)
    const lambda = tableErrorOn(driveScenario({ ...scenario, seed: scenario.seed + 10 }, table), plant, table, known)
    steps.push({
      rms: rms(errors),
      worst: Math.max(...errors.map(Math.abs)),
      lambdaRms: rms(lambda),
      within2: (100 * errors.filter((error) => Math.abs(error) <= 2).length) / errors.length,
    })
  }
  return steps
}

/** How far off lambda the table alone puts the next drive, %, at the samples between known cells. */
function tableErrorOn(next: Drive, plant: Plant, table: Float64Array, known: readonly number[]): number[] {
  const has = new Set(known)
  const prepared = prepare(next, plant.facts, plant.grid)
  const out: number[] = []
  for (let i = 0; i < prepared.n; i += 1) {
    if (prepared.role[i] !== Role.speaks) continue
    const corner = cornerAt(plant.grid, next.rpm[i]!, next.mapKpa[i]!)
    if (!corner.cells.every((cell, k) => corner.weights[k] === 0 || has.has(cell))) continue
    const ve = valueAt(plant.grid, table, next.rpm[i]!, next.mapKpa[i]!)
    out.push(100 * Math.log(plant.engine.trueVe(next.rpm[i]!, next.mapKpa[i]!) / ve))
  }
  return out
}

export function flashAndDrive(): void {
  const group = 'flash'
  console.log('\nflash and drive, 15 minutes each: cell RMS / worst / lambda RMS, % after each flash')
  const show = (name: string, method: string, steps: readonly Step[]) => {
    progress('')
    console.log(
      `${name} ${method}`.padEnd(28),
      steps.map((s) => `${s.rms.toFixed(2)} / ${s.worst.toFixed(1)} / ${s.lambdaRms.toFixed(2)}`.padStart(20)).join(''),
    )
  }
  const remembered = runs.map(({ name, plant, habit }) => {
    show(
      name,
      'nearest cell',
      play(name, plant, habit, (proposal) => proposal.handNearest, false),
    )
    show(
      name,
      'bilinear',
      play(name, plant, habit, (proposal) => proposal.handBilinear, false),
    )
    show(
      name,
      'Kalman, restarted',
      play(name, plant, habit, (_, drive, table) => kalman(drive, { ...plant, start: table }), false),
    )
    show(
      name,
      'newest log only',
      play(name, plant, habit, (proposal) => proposal.fitted, false),
    )
    const steps = play(name, plant, habit, (proposal) => proposal.fitted, true)
    show(name, 'with memory', steps)
    return steps
  })
  const first = remembered.map((steps) => steps.findIndex((step) => step.within2 >= 95) + 1 || Infinity)
  judge(group, 'flashes until 95 % of the cells are within 2 %, worst run', Math.max(...first), '', { atMost: 1 })
  const later = remembered.flatMap((steps) => steps.slice(1))
  judge(group, 'cell RMS after flashes 2 to 5, largest', Math.max(...later.map((s) => s.rms)), '%', { atMost: 0.85 })
  judge(group, 'worst cell after flashes 2 to 5, largest', Math.max(...later.map((s) => s.worst)), '%', { atMost: 3 })
  note({
    group,
    name: 'lambda RMS after the last flash, largest',
    value: Math.max(...remembered.map((s) => s.at(-1)!.lambdaRms)),
    unit: '%',
  })
}
