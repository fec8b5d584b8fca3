/** How near the learner comes to the simulator's truth, beside what people and the literature do; and what the guard costs. */
import { highLoadKpa } from '../../shared/grid.ts'
import { learn, type Learned } from '../../server/core/learn.ts'
import { totalDelayS } from '../../server/core/model/path.ts'
import { prepare, Role } from '../../server/core/model/prepare.ts'
import type { Drive } from '../../server/core/drive.ts'
import { kalman, recursiveLeastSquares } from './peers.ts'
import { judge, mean, median, note, progress, rms } from './report.ts'
import { driveScenario, scenarios, type Scenario } from './scenarios.ts'
import { bestTable, errorsPct, neighboursOf } from './truth.ts'

interface Score {
  readonly scenario: Scenario
  readonly drive: Drive
  readonly proposal: Learned
  readonly truth: Float64Array
  readonly visited: readonly number[]
  readonly neighbours: readonly number[]
}

/** A step cap wide enough to see the guard alone. */
export const openCap = { stepCapPct: 50 }

/** One drive is one draw of drift and level: three of each scenario, so that coverage means something. */
const everySeed = scenarios.flatMap((scenario) =>
  [0, 1000, 2000].map((more) => ({ ...scenario, seed: scenario.seed + more })),
)

let scored: readonly Score[] | null = null
function scores(): readonly Score[] {
  scored ??= everySeed.map((scenario, done) => {
    const { plant } = scenario
    progress(`learning drive ${done + 1} of ${everySeed.length}`)
    const drive = driveScenario(scenario)
    const result = learn({
      drives: [drive],
      engine: plant.facts,
      grid: plant.grid,
      current: plant.start,
      settings: openCap,
    })
    if (!result.ok) throw new Error(`${scenario.name}: ${result.detail}`)
    const { proposal } = result
    const visited = [...proposal.evidenceS.keys()].filter((cell) => proposal.evidenceS[cell]! >= 1)
    return {
      scenario,
      drive,
      proposal,
      truth: bestTable(plant, [drive]),
      visited,
      neighbours: neighboursOf(plant.grid, visited),
    }
  })
  progress('')
  return scored
}

const covered = ({ proposal, truth }: Score, cells: readonly number[]): number =>
  (100 *
    cells.filter(
      (cell) => Math.abs(100 * Math.log(proposal.fitted[cell]! / truth[cell]!)) <= 2 * proposal.sigmaPct[cell]!,
    ).length) /
  cells.length

/** Errors less their mean: every drive delivers its fuel a little off all others, and the truth is not known to it. */
const withoutLevel = (errors: readonly number[]): number[] => errors.map((error) => error - mean(errors))

/** Error of the total delay at a share of the exhaust flows met, % of the true one. */
function delayErrorPct({ drive, scenario, proposal, truth }: Score, share: number): number {
  const { plant } = scenario
  const prepared = prepare(drive, plant.facts, plant.grid)
  const flows: number[] = []
  for (let i = 0; i < prepared.n; i += 1) {
    if (prepared.role[i] !== Role.speaks) continue
    let ve = 0
    for (let k = 4 * i; k < 4 * i + 4; k += 1) ve += prepared.weights[k]! * truth[prepared.cells[k]!]!
    flows.push(prepared.airPerVe[i]! * ve)
  }
  const air = flows.toSorted((a, b) => a - b)[Math.floor(share * flows.length)]!
  const { transport, sensor, stoichAfr } = plant.engine
  const real = transport.t0S + transport.massKg / air + sensor.lagS
  // The simulator's pipe holds a mass of air; the learner's one of exhaust, a fuel's share more.
  const found = totalDelayS(proposal.path, air * (1 + 1 / stoichAfr))
  return 100 * Math.abs(found / real - 1)
}

export function accuracy(): void {
  const group = 'accuracy'
  console.log('\naccuracy: RMS error in % of visited cells (at least 1 s of evidence) against the grid’s best table')
  const heads = [
    'base',
    'nearest',
    'bilinear',
    'Kalman',
    'RLS',
    'learned',
    'worst',
    '2 sd %',
    'beside',
    '2 sd %',
    'delay %',
  ]
  console.log('scenario'.padEnd(26), heads.map((word) => word.padStart(9)).join(''))
  const all = scores().map((score) => {
    const { scenario, proposal, truth, visited, neighbours, drive } = score
    const of = (values: Float64Array, cells = visited) => rms(errorsPct(values, truth, cells))
    const figures = {
      base: of(scenario.plant.start),
      nearest: of(proposal.handNearest),
      bilinear: of(proposal.handBilinear),
      kalman: of(kalman(drive, scenario.plant)),
      rls: of(recursiveLeastSquares(drive, scenario.plant)),
      learned: of(proposal.fitted),
      shape: rms(withoutLevel(errorsPct(proposal.fitted, truth, visited))),
      nearestShape: rms(withoutLevel(errorsPct(proposal.handNearest, truth, visited))),
      worst: Math.max(...errorsPct(proposal.fitted, truth, visited).map(Math.abs)),
      covered: covered(score, visited),
      beside: of(proposal.fitted, neighbours),
      besideCovered: covered(score, neighbours),
      delays: [0.1, 0.5, 0.95].map((share) => delayErrorPct(score, share)),
    }
    const { shape: _, nearestShape: __, delays, ...shown } = figures
    const line = [...Object.values(shown), Math.max(...delays)]
    console.log(scenario.name.padEnd(26), line.map((value) => value.toFixed(2).padStart(9)).join(''))
    return figures
  })
  const pick = (of: (each: (typeof all)[number]) => number) => all.map(of)
  const learned = pick((each) => each.learned)
  judge(group, 'RMS of visited cells, median', median(learned), '%', { atMost: 1 })
  judge(group, 'RMS of visited cells, any one', Math.max(...learned), '%', { atMost: 1.5 })
  note({
    group,
    name: 'the same but for one factor over the whole drive, which no single drive can tell, any one',
    value: Math.max(...pick((each) => each.shape)),
    unit: '%',
  })
  judge(group, 'ratio to the nearest-cell average, median', median(pick((e) => e.learned / e.nearest)), '', {
    atMost: 0.2,
  })
  note({
    group,
    name: 'the same but for one factor over the whole drive in both, median',
    value: median(pick((e) => e.shape / e.nearestShape)),
    unit: '',
  })
  judge(group, 'ratio to the bilinear average, median', median(pick((e) => e.learned / e.bilinear)), '', {
    atMost: 0.4,
  })
  note({ group, name: 'ratio to the Kalman peer, median', value: median(pick((e) => e.learned / e.kalman)), unit: '' })
  note({ group, name: 'ratio to the RLS peer, median', value: median(pick((e) => e.learned / e.rls)), unit: '' })
  judge(group, 'worst visited cell, median', median(pick((e) => e.worst)), '%', { atMost: 3 })
  judge(group, 'worst visited cell, any one', Math.max(...pick((e) => e.worst)), '%', { atMost: 5.5 })
  judge(group, 'RMS of never-visited neighbours, median', median(pick((e) => e.beside)), '%', { atMost: 3 })
  judge(group, '2-sigma coverage of neighbours, mean', mean(pick((e) => e.besideCovered)), '%', { atLeast: 85 })
  judge(group, '2-sigma coverage, mean', mean(pick((e) => e.covered)), '%', { atLeast: 90, atMost: 98 })
  judge(group, '2-sigma coverage, lowest', Math.min(...pick((e) => e.covered)), '%', { atLeast: 75 })
  ;['10', '50', '95'].forEach((share, i) =>
    judge(group, `total delay error at ${share} % of the flows, mean`, mean(pick((e) => e.delays[i]!)), '%', {
      atMost: 25,
    }),
  )
}

/** Share of high-load cells that a proposal would leave lean, with and without the guard. */
export function guardTable(): void {
  const group = 'guard'
  console.log('\nguard: cells at high load left leaner than the truth')
  const share = (values: (score: Score) => Float64Array, cells: (score: Score) => readonly number[], limit: number) => {
    let lean = 0
    let total = 0
    for (const score of scores()) {
      const { grid } = score.scenario.plant
      const loaded = cells(score).filter(
        (cell) => grid.mapKpa[Math.floor(cell / grid.rpm.length)]! >= highLoadKpa(grid),
      )
      total += loaded.length
      lean += errorsPct(values(score), score.truth, loaded).filter((error) => error < -limit).length
    }
    return (100 * lean) / total
  }
  const visited = (score: Score) => score.visited
  const never = (score: Score) => [...score.truth.keys()].filter((cell) => !score.proposal.hasEvidence[cell])
  const fitted = (score: Score) => score.proposal.fitted
  const proposed = (score: Score) => score.proposal.proposed
  const hand = (score: Score) => score.proposal.handNearest
  for (const limit of [2, 3]) {
    note({
      group,
      name: `visited, leaner than ${limit} %, nearest-cell average`,
      value: share(hand, visited, limit),
      unit: '%',
    })
    note({
      group,
      name: `visited, leaner than ${limit} %, without the guard`,
      value: share(fitted, visited, limit),
      unit: '%',
    })
    judge(group, `visited, leaner than ${limit} %, proposed`, share(proposed, visited, limit), '%', {
      atMost: limit === 2 ? 1 : 0,
    })
  }
  const unguarded = share(fitted, never, 3)
  note({ group, name: 'never visited, leaner than 3 %, the fit carried on', value: unguarded, unit: '%' })
  const left = share((score) => score.scenario.plant.start, never, 3)
  note({ group, name: 'never visited, leaner than 3 %, the table as it was', value: left, unit: '%' })
  judge(
    group,
    'never visited, leaner than 3 %, proposed, beyond the table as it was',
    share(proposed, never, 3) - left,
    '%',
    { atMost: 0 },
  )
  const rich = scores().flatMap(({ proposal, truth, visited: cells, scenario: { plant } }) => {
    const loaded = cells.filter(
      (cell) => plant.grid.mapKpa[Math.floor(cell / plant.grid.rpm.length)]! >= highLoadKpa(plant.grid),
    )
    const cost = (values: Float64Array) => mean(errorsPct(values, truth, loaded))
    return loaded.length > 0 ? [cost(proposal.proposed) - cost(proposal.fitted)] : []
  })
  note({ group, name: 'what the guard costs, mean richness at high load', value: mean(rich), unit: '%' })
}
