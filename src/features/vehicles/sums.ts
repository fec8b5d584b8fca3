/** What follows from the engine sheet, each with its sum spelled out. Pure. */
import type { EngineSheetInput } from '../../../shared/contract/vehicles.ts'
import { formatNumber } from '../../lib/format.ts'

export interface Sum {
  readonly name: string
  readonly sum: string
  readonly value: number
  readonly digits: number
  readonly unit: string
}

/** Specific gas constant of dry air, J/(kg K): CODATA 2018 R over the CIPM-2007 molar mass. */
const gasConstantAir = 287.05
/** Reference state of the sums: 100 kPa, 20 °C. */
const referenceK = 293.15

/** Base pulse width and injector duty, by the ideal gas law from displacement and injector flow. */
export function sumsOf(sheet: EngineSheetInput): Sum[] {
  const n = formatNumber
  const cylinderCc = (sheet.displacementL * 1000) / sheet.cylinders
  const airMg = (100 * cylinderCc * 1000) / (gasConstantAir * referenceK)
  const fuelMg = airMg / sheet.stoichAfr
  const rate = (sheet.injectorFlowCcMin * sheet.fuelDensityGPerCc) / 60
  const base = fuelMg / rate
  const cycle = 120_000 / sheet.revLimitRpm
  const full = base * 0.9 * 1.03 * (1 / 0.88)
  const open = full + sheet.deadTimeMs
  return [
    {
      name: 'One cylinder',
      sum: `${n(sheet.displacementL * 1000)} ÷ ${sheet.cylinders}`,
      value: cylinderCc,
      digits: 1,
      unit: 'cc',
    },
    {
      name: 'Air in it at 100 kPa and 20 °C',
      sum: `100 kPa × ${n(cylinderCc, 1)} cc ÷ (287.05 × 293.15 K)`,
      value: airMg,
      digits: 0,
      unit: 'mg',
    },
    { name: 'Fuel for it', sum: `${n(airMg)} ÷ ${n(sheet.stoichAfr, 2)}`, value: fuelMg, digits: 1, unit: 'mg' },
    {
      name: 'What an injector gives',
      sum: `${n(sheet.injectorFlowCcMin)} ÷ 60 × ${n(sheet.fuelDensityGPerCc, 3)}`,
      value: rate,
      digits: 3,
      unit: 'mg/ms',
    },
    { name: 'Base pulse width', sum: `${n(fuelMg, 1)} ÷ ${n(rate, 3)}`, value: base, digits: 2, unit: 'ms' },
    {
      name: 'At the rev limit, 103 kPa, VE 90 %, lambda 0.88',
      sum: `${n(base, 2)} × 0.90 × 1.03 ÷ 0.88 + ${n(sheet.deadTimeMs, 2)}`,
      value: open,
      digits: 2,
      unit: 'ms',
    },
    { name: 'One cycle lasts', sum: `120 000 ÷ ${sheet.revLimitRpm}`, value: cycle, digits: 2, unit: 'ms' },
    { name: 'Injector duty', sum: `${n(open, 2)} ÷ ${n(cycle, 2)}`, value: (100 * open) / cycle, digits: 1, unit: '%' },
  ]
}

/** Sustained duty above this no longer meters fuel well: common practice, no source. */
export const dutyLimitPct = 85
