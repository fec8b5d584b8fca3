/** The simulator: the same bytes every time, and physics that a hand calculation agrees with. */
import { readFileSync } from 'node:fs'
import { describe, expect, test } from 'vitest'
import { sampleFiles } from '../../../sample-logs/make.ts'
import { flatbed } from '../../../sample-logs/simulator/demo.ts'
import { seeded } from '../../../sample-logs/simulator/random.ts'
import { simulate } from '../../../sample-logs/simulator/simulate.ts'

test('the sample files are what the generator makes, byte for byte', () => {
  for (const [name, content] of sampleFiles())
    expect(readFileSync(`sample-logs/${name}`, 'utf8') === content, name).toBe(true)
})

describe('physics', () => {
  const still = { ...flatbed.engine, film: { share: 0, tauS: 1 } }
  const grid = flatbed.grid
  const exact = grid.mapKpa.flatMap((map) => grid.rpm.map((rpm) => still.trueVe(rpm, map)))
  const run = (factor: number) =>
    simulate({
      engine: still,
      flashed: { grid, ve: exact.map((ve) => ve * factor) },
      target: { grid, lambda: exact.map(() => 1) },
      habit: 'road',
      seconds: 400,
      rateHz: 10,
      seed: 5,
      startC: 88,
    })
  const settled = (log: ReturnType<typeof run>) =>
    log['Lambda']!.filter((_, i) => log['Time (s)']![i]! > 30 && log['Pulse width (ms)']![i]! > 0)
  const median = (values: readonly number[]) => values.toSorted((a, b) => a - b)[values.length >> 1]!

  test('with a true table the sensor reads the target; with a table 10 % too high it reads 1/1.1 of it', () => {
    expect(median(settled(run(1)))).toBeCloseTo(1, 1)
    expect(median(settled(run(1.1))) / median(settled(run(1)))).toBeCloseTo(1 / 1.1, 2)
  })

  test('a cut injector makes the sensor read its lean limit', () => {
    const log = run(1)
    const cut = log['Pulse width (ms)']!.map((pulse, i) =>
      pulse === 0 && log['Pulse width (ms)']![i - 8] === 0 ? log['Lambda']![i]! : null,
    ).filter((value) => value !== null)
    expect(cut.length).toBeGreaterThan(5)
    expect(median(cut)).toBe(still.sensor.high)
  })

  test('draws are normal: mean 0, variance 1, within three standard errors of 50 000 draws', () => {
    const random = seeded(42)
    const draws = Array.from({ length: 50_000 }, () => random.normal())
    const mean = draws.reduce((sum, each) => sum + each, 0) / draws.length
    const variance = draws.reduce((sum, each) => sum + (each - mean) ** 2, 0) / draws.length
    expect(Math.abs(mean)).toBeLessThan(3 / Math.sqrt(draws.length))
    expect(Math.abs(variance - 1)).toBeLessThan(3 * Math.sqrt(2 / draws.length))
  })
})
