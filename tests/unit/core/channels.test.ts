/** Recognising columns, units and the health of channels. */
import { unit } from 'mathjs'
import { describe, expect, test } from 'vitest'
import { conversion } from '../../../server/core/channels/convert.ts'
import { channelHealth } from '../../../server/core/channels/health.ts'
import { noiseOf } from '../../../server/core/channels/measures.ts'
import { recogniseName } from '../../../server/core/channels/names.ts'
import { evenTime, missingChannels, recogniseColumns, toChannels } from '../../../server/core/channels/recognise.ts'
import type { ChannelName } from '../../../shared/contract/logs.ts'

describe('names', () => {
  // Terms and abbreviations of SAE J1930 / ISO 15031-2 (from memory), and spellings of other languages.
  test.each([
    ['MAP', 'map'],
    ['Manifold Absolute Pressure', 'map'],
    ['ECT', 'ect'],
    ['Engine Coolant Temperature', 'ect'],
    ['IAT', 'iat'],
    ['TP', 'tp'],
    ['Throttle_Position', 'tp'],
    ['BARO', 'baro'],
    ['Drehzahl', 'rpm'],
    ['Régime moteur', 'rpm'],
    ['Kühlmitteltemperatur', 'ect'],
    ['Kuehlmitteltemperatur', 'ect'],
    ['Température d’air', 'iat'],
    ['Presión admisión', 'map'],
    ['Tension batterie', 'battery'],
    ['TPS 1', 'tp'],
    ['Lambda 2', null],
    ['vehicle speed', null],
    ['Saugrohrdruck', 'map'],
    ['STFT', 'trim'],
    ['knock', null],
  ])('%s is %s', (title, channel) => expect(recogniseName(title)).toBe(channel))
})

describe('units', () => {
  // mathjs carries the exact definitions of the pound, inch and standard gravity.
  test.each([
    ['psi', 14.5, unit(14.5, 'psi').toNumber('kPa')],
    ['bar', 1.2, unit(1.2, 'bar').toNumber('kPa')],
    ['mbar', 1013, unit(1013, 'mbar').toNumber('kPa')],
    ['inHg', 29.92, unit(29.92 * 25.4, 'mmHg').toNumber('kPa')],
  ])('pressure in %s', (name, value, kpa) => expect(conversion('map', name, 14.7)!(value)).toBeCloseTo(kpa, 3))

  test.each([
    ['°F', 212, 100],
    ['F', 32, 0],
    ['K', 273.15, 0],
    ['°C', 20, 20],
  ])('temperature in %s', (name, value, celsius) =>
    expect(conversion('ect', name, 14.7)!(value)).toBeCloseTo(celsius, 10),
  )

  test('air-fuel ratio is lambda of the fuel it was computed with', () => {
    expect(conversion('lambda', 'AFR', 14.7)!(14.7)).toBe(1)
    expect(conversion('lambda', 'phi', 14.7)!(1.25)).toBe(0.8)
  })

  // 101.325 kPa: US Standard Atmosphere 1976, sea level.
  test.each(['psig', 'psi gauge', 'psi (g)', 'PSI rel'])('%s is measured from the air outside', (name) => {
    expect(conversion('map', name, 14.7)!(0)).toBe(101.325)
    expect(conversion('map', name, 14.7, 90)!(0)).toBe(90)
  })
  test.each(['kPa', 'kPa abs', 'kPa (abs)', 'kPaa'])('%s is absolute', (name) =>
    expect(conversion('map', name, 14.7)!(100)).toBe(100),
  )
  test('100 % of the base amount is no correction', () =>
    expect(conversion('warmup', '% (100 = none)', 14.7)!(112)).toBe(12))

  test('a unit nobody knows is null, not a guess', () => expect(conversion('map', 'furlong', 14.7)).toBeNull())
})

describe('recognition', () => {
  const rows = 50
  const make = (low: number, high: number) =>
    Float32Array.from({ length: rows }, (_, i) => low + ((high - low) * i) / (rows - 1))

  test('pounds, Fahrenheit and air-fuel ratio are understood from names and numbers alone', () => {
    const mapping = recogniseColumns(
      ['Time', 'RPM', 'MAP', 'AFR', 'CLT'],
      ['', '', '', '', ''],
      [make(0, 49), make(800, 5000), make(5, 14.5), make(11, 15), make(60, 200)],
      14.7,
    )
    expect(mapping.map(({ channel, unit: name }) => [channel, name])).toEqual([
      ['time', 's'],
      ['rpm', 'rpm'],
      ['map', 'psi'],
      ['lambda', 'AFR'],
      ['ect', 'F'],
    ])
    expect(missingChannels(mapping)).toEqual([])
  })

  test('boost without a unit is asked about, not guessed', () => {
    const [column] = recogniseColumns(['Boost'], [''], [make(-0.8, 1.1)], 14.7)
    expect(column!.channel).toBeNull()
    expect(column!.reason).toMatch(/runs from -0\.8/)
  })

  const guess = (title: string, unit: string, low: number, high: number) => {
    const [column] = recogniseColumns([title], [unit], [make(low, high)], 14.7)
    return [column!.channel, column!.channel ? column!.unit : null]
  }
  test.each([
    ['volts of an oxygen sensor', 'O2', 'V', 0.1, 0.9, null, null],
    ['an oxygen sensor without a unit', 'O2 sensor 1', '', 0.1, 0.9, null, null],
    ['volts of a pressure sensor', 'MAP', 'V', 0.5, 4.5, null, null],
    ['degrees of a throttle', 'TPS', 'deg', 0, 80, null, null],
    // SAE J1979 says "equivalence ratio" for lambda, textbooks for its inverse (from memory): nobody but the user knows.
    ['an equivalence ratio', 'Equivalence ratio', '', 0.8, 1.2, null, null],
    ['an air-fuel ratio that cannot be one', 'Lambda', 'AFR', 0.8, 1.1, null, null],
    ['a lambda that cannot be one', 'Lambda', 'lambda', 11, 16, null, null],
    ['a trim that is neither factor nor percentage', 'Trim', '', 1.2, 2.9, null, null],
    ['boost in pounds', 'Boost', 'psi', -10, 12, 'map', 'psi gauge'],
    ['boost that never falls below zero', 'Boost', 'psi', 0, 12, 'map', 'psi gauge'],
    ['absolute boost pressure', 'Boost pressure', 'kPa abs', 30, 180, 'map', 'kPa abs'],
    ['warm-up in percent of the base amount', 'Warm-up', '%', 100, 160, 'warmup', '% (100 = none)'],
    ['a factor', 'Trim', '', 0.9, 1.1, 'trim', 'factor'],
    ['a unit that says none', 'Lambda', '-', 0.8, 1.2, 'lambda', 'lambda'],
  ] as const)('%s: %s in “%s” from %d to %d is %s in %s', (_, title, unit, low, high, channel, used) =>
    expect(guess(title, unit, low, high)).toEqual([channel, used]),
  )

  test('intake air of 90 beside coolant of 190 is in Fahrenheit too', () => {
    const mapping = recogniseColumns(['CLT', 'IAT'], ['', ''], [make(60, 190), make(70, 95)], 14.7)
    expect(mapping.map(({ unit: name }) => name)).toEqual(['F', 'F'])
  })

  test('gauge pressure counts from the log’s own barometer', () => {
    const columns = [make(-5, 5), make(90, 90)]
    const mapping = recogniseColumns(['MAP', 'Baro'], ['psi', 'kPa'], columns, 14.7)
    const map = toChannels(mapping, columns, 14.7).get('map')!
    expect(map[0]).toBeCloseTo(90 - unit(5, 'psi').toNumber('kPa'), 4)
  })

  test('a column said to be a channel in a unit nobody knows is still missing', () => {
    const said = { index: 0, header: 'x', channel: 'lambda', unit: 'V', confidence: 1, reason: '' } as const
    expect(missingChannels([said])).toContain('lambda')
    expect(missingChannels([{ ...said, unit: 'AFR' }])).not.toContain('lambda')
  })

  test('a time column without a readable time is no time', () => {
    const [column] = recogniseColumns(['Time'], [''], [Float64Array.from([NaN, NaN])], 14.7)
    expect(column!.channel).toBeNull()
  })

  test('time that restarts or stands goes on growing', () => {
    const even = evenTime(Float64Array.from([100, 100.1, 100.2, 0, 0.1, 0.1, 0.2]))
    even.forEach((t, i) => expect(t).toBeCloseTo(i * 0.1, 6))
  })
})

describe('health', () => {
  const facts = { boosted: false, lambdaLow: 0.65, lambdaHigh: 1.36, rateHz: 20 }
  const of = (channel: 'iat' | 'map' | 'lambda' | 'ect', values: number[]) =>
    channelHealth(new Map([[channel, values]]), facts).find((each) => each.channel === channel)!
  test.each([
    ['iat', [-40, -40, -40], 'dead', /open circuit/],
    ['iat', [], 'dead', /Sends nothing/],
    ['ect', [12, 20, 35], 'caution', /Never warmer than 35/],
    ['map', [30, 60, 150], 'caution', /without boost/],
    ['lambda', [0.65, 0.65, 0.65, 1.36], 'dead', /end of its range/],
    [
      'lambda',
      Array.from({ length: 100 }, (_, i) => (i === 4 ? 0 : 0.9 + i / 1000)),
      'caution',
      /Drops out for 1\.0 %/,
    ],
    ['map', [30, 60, 99], 'sound', /Moves/],
  ] as const)('%s %j is %s', (channel, values, state, words) => {
    const health = of(channel, [...values])
    expect(health.state).toBe(state)
    expect(health.remark).toMatch(words)
  })

  const rows = (count: number, at: (i: number) => number) => Float64Array.from({ length: count }, (_, i) => at(i))
  const state = (name: ChannelName, channels: ReadonlyMap<ChannelName, Float64Array>) =>
    channelHealth(channels, facts).find((each) => each.channel === name)!

  test('rows that repeat are named with the interval of real readings', () => {
    // Rows every 0.5 s, new every 2 s: the interval is 0.5 s / (1/4).
    const channels = new Map<ChannelName, Float64Array>([
      ['time', rows(401, (i) => i / 2)],
      ['rpm', rows(401, (i) => 1500 + Math.floor(i / 4))],
      ['map', rows(401, () => 40)],
    ])
    expect(state('time', channels)).toMatchObject({
      state: 'caution',
      remark: expect.stringMatching(/every 2\.00 s though rows come every 0\.50 s/) as string,
    })
  })

  test.each([
    ['intake air hotter than coolant', 'iat', (i: number) => 95 + (i % 3), /Hotter than the coolant/],
    ['pressure that freezes', 'map', (i: number) => (i > 100 && i < 300 ? 50 : 40 + (i % 7) / 3), /Frozen for 10 s/],
    ['a coarse pressure', 'map', (i: number) => 40 + 3 * (i % 4), /steps of 3 kPa/],
    ['a hole in time', 'time', (i: number) => i / 20 + (i > 200 ? 4 : 0), /1 gap, the longest 4\.\d s/],
    ['a dead coolant sensor, with what it spoils', 'ect', () => -40, /open circuit.*warm-up fuel/],
  ] as const)('%s', (_, name, at, words) => {
    const channels = new Map<ChannelName, Float64Array>([
      ['time', rows(400, (i) => i / 20)],
      ['rpm', rows(400, (i) => 1500 + (i % 9))],
      ['map', rows(400, (i) => 40 + (i % 7) / 3)],
      ['ect', rows(400, (i) => 82 + (i % 2))],
    ])
    channels.set(name, rows(400, at))
    expect(state(name, channels).state).not.toBe('sound')
    expect(state(name, channels).remark).toMatch(words)
  })

  test('noise is that of the deviates put in', () => {
    // Mean of twelve even draws less six: near normal, standard deviation 1; the draws from a known congruence.
    let seed = 1
    const draw = () => (seed = (seed * 48271) % 2147483647) / 2147483647
    const normal = () => Array.from({ length: 12 }, draw).reduce((sum, each) => sum + each, -6)
    expect(noiseOf(rows(5000, (i) => i / 10 + 0.3 * normal()))).toBeCloseTo(0.3, 1)
  })

  test('the worst comes first, what the file lacks last', () => {
    const all = channelHealth(
      new Map([
        ['map', [30, 60, 99]],
        ['iat', [-40, -40]],
      ] as const),
      facts,
    )
    expect(all[0]!.channel).toBe('iat')
    expect(all.at(-1)!.state).toBe('absent')
  })
})
