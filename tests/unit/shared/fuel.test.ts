/** Stoichiometric ratios and blends against handbook values. */
import fc from 'fast-check'
import { describe, expect, test } from 'vitest'
import { blend, stoichiometricAfr } from '../../../shared/fuel.ts'

describe('stoichiometric ratio of CH_y O_z', () => {
  // Heywood, Internal Combustion Engine Fundamentals (1988), table D.4, from memory; ethanol 9 by the US DOE fuel table.
  test.each([
    ['methane', 4, 0, 17.23],
    ['propane', 8 / 3, 0, 15.67],
    ['isooctane', 2.25, 0, 15.13],
    ['petrol CH1.87', 1.87, 0, 14.6],
    ['ethanol', 3, 0.5, 9.0],
    ['methanol', 4, 1, 6.47],
    ['toluene', 8 / 7, 0, 13.5],
    // Default compositions of 40 CFR 1065.655 through the same formula.
    ['E10', 1.92, 0.03, 14.04],
    ['E85', 2.73, 0.36, 10.12],
  ])('%s', (_, hydrogen, oxygen, afr) =>
    expect(Math.abs(stoichiometricAfr({ hydrogen, oxygen }) - afr)).toBeLessThan(0.006),
  )
})

describe('blends of ethanol with petrol of 745 kg/m³ and 14.5997', () => {
  const base = { densityGPerCc: 0.745, stoichAfr: 14.5997 }
  const ethanol = { densityGPerCc: 0.7894, stoichAfr: 9.0025 }
  // Mass fraction, density and ratio worked out by the rule of mass; averaging by volume would give 9.8421 for E85.
  test.each([
    [0.05, 0.0528, 0.74722, 14.304],
    [0.1, 0.1053, 0.74944, 14.0101],
    [0.5, 0.5145, 0.7672, 11.7201],
    [0.85, 0.8572, 0.78274, 9.8016],
    [1, 1, 0.7894, 9.0025],
  ])('%s by volume', (volume, mass, density, afr) => {
    const mixed = blend(base, ethanol, volume)
    expect(mixed.massFraction).toBeCloseTo(mass, 4)
    expect(mixed.densityGPerCc).toBeCloseTo(density, 5)
    expect(mixed.stoichAfr).toBeCloseTo(afr, 3)
  })

  test('more ethanol always means a lower ratio and a denser fuel', () => {
    const part = fc.double({ min: 0, max: 1, noNaN: true })
    fc.assert(
      fc.property(part, part, (a, b) => {
        const [less, more] = a < b ? [a, b] : [b, a]
        expect(blend(base, ethanol, more).stoichAfr).toBeLessThanOrEqual(blend(base, ethanol, less).stoichAfr + 1e-12)
        expect(blend(base, ethanol, more).densityGPerCc).toBeGreaterThanOrEqual(
          blend(base, ethanol, less).densityGPerCc - 1e-12,
        )
      }),
      { seed: 6 },
    )
  })
})
