/** Bad logs and faults that look like a wrong table: refused or named, and a good log's answer unchanged. */
import { flatbed } from '../../sample-logs/simulator/demo.ts'
import { learn } from '../../server/core/learn.ts'
import type { Drive } from '../../server/core/drive.ts'
import { openCap } from './accuracy.ts'
import { note } from './report.ts'
import { driveScenario, plants, type Plant } from './scenarios.ts'

const learnOn = (plant: Plant, drive: Drive) =>
  learn({ drives: [drive], engine: plant.facts, grid: plant.grid, current: drive.flashed.ve, settings: openCap })

export function faults(): void {
  const group = 'faults'
  console.log('\nfaults: fault against verdict')
  const plant = plants.richSix
  const base = { name: 'six', plant, habit: 'hills' as const, seconds: 900, rateHz: 20, seed: 301, startC: 74 }
  const good = driveScenario(base)
  const first = learnOn(plant, good)
  const bad: readonly [string, Drive][] = [
    ['flat MAP', { ...good, mapKpa: good.mapKpa.map(() => 45) }],
    ['pegged wideband', { ...good, lambda: good.lambda.map((_, i) => (i % 900 === 0 ? 1 : 0.65)) }],
    ['swapped rpm and MAP', { ...good, rpm: good.mapKpa, mapKpa: good.rpm }],
    ['MAP in psi taken as kPa', { ...good, mapKpa: good.mapKpa.map((kpa) => kpa * 0.145) }],
    ['dead wideband', { ...good, lambda: good.lambda.map(() => 0) }],
  ]
  for (const [name, drive] of bad) {
    const result = learnOn(plant, drive)
    const verdict = result.ok ? 'a proposal' : result.reason
    note({ group, name: `${name}: ${verdict}`, value: result.ok ? 0 : 1, unit: '', bar: 'refused', ok: !result.ok })
  }
  const among = bad.map(([, drive]) => {
    const culprit = { ...drive, id: 'bad', number: 2 }
    const result = learn({
      drives: [{ ...good, number: 1 }, culprit],
      engine: plant.facts,
      grid: plant.grid,
      current: good.flashed.ve,
      settings: openCap,
    })
    return !result.ok && result.driveId === culprit.id
  })
  const named = among.filter(Boolean).length
  note({
    group,
    name: 'beside a good log the bad one is named',
    value: named,
    unit: `of ${bad.length}`,
    bar: 'all',
    ok: named === bad.length,
  })
  const again = learnOn(plant, good)
  const same =
    first.ok && again.ok && first.proposal.fitted.every((value, cell) => value === again.proposal.fitted[cell])
  note({ group, name: 'a good log’s answer after them, same bits', value: same ? 1 : 0, unit: '', bar: '1', ok: same })

  const truthTable = good.flashed.ve.map((_, cell) =>
    plant.engine.trueVe(
      plant.grid.rpm[cell % plant.grid.rpm.length]!,
      plant.grid.mapKpa[Math.floor(cell / plant.grid.rpm.length)]!,
    ),
  )
  const shaped: readonly [string, string | null, Drive][] = [
    ['exhaust leak', 'exhaust-leak', driveScenario(base, truthTable, { leakKgS: 4e-4 })],
    ['dead time 0.3 ms short', 'dead-time', driveScenario(base, truthTable, { deadTimeErrorMs: -0.3 })],
    ['dead time 0.3 ms long', 'dead-time', driveScenario(base, truthTable, { deadTimeErrorMs: 0.3 })],
    [
      'one factor of 12 %',
      'scale',
      driveScenario(
        base,
        truthTable.map((ve) => 1.12 * ve),
      ),
    ],
    ['a hand-made table, no fault', null, driveScenario(base, flatbed.flashed)],
    ['a right table, no fault', null, driveScenario(base, truthTable)],
  ]
  for (const [name, expected, drive] of shaped) {
    const result = learnOn(plant, drive)
    const said: string[] = result.ok ? result.proposal.diagnoses.map((each) => each.kind) : [result.reason]
    const ok = expected === null ? said.length === 0 : said.includes(expected)
    note({
      group,
      name: `${name}: ${said.join(', ') || 'nothing said'}`,
      value: ok ? 1 : 0,
      unit: '',
      bar: expected ?? 'nothing said',
      ok,
    })
  }
}
