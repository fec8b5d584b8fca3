/** Injector duty a table asks for, from the engine sheet. Pure. */
import type { EngineSheetInput } from '../../../shared/contract/vehicles.ts'
import type { Grid } from '../../../shared/grid.ts'

/** Specific gas constant of dry air, J/(kg K): CODATA 2018 R over the CIPM-2007 molar mass. */
const gasConstantAir = 287.05
/** Intake air of the sums, K: 20 °C. Colder air asks for more. */
const intakeK = 293.15
/** Sustained duty above this no longer meters fuel well: common practice, no source. */
export const dutyLimitPct = 85

/**
 * Share of the cycle the injector is open, %, one squirt a cycle: air of one cylinder by the ideal gas law, fuel by
 * lambda, time by the injector's flow, and its dead time.
 * @param ve  volumetric efficiency, %.
 */
export function dutyPct(sheet: EngineSheetInput, rpm: number, mapKpa: number, ve: number, lambda: number): number {
  const cylinderCc = (sheet.displacementL * 1000) / sheet.cylinders
  const airMg = (mapKpa * cylinderCc * 1000 * (ve / 100)) / (gasConstantAir * intakeK)
  const fuelMg = airMg / (sheet.stoichAfr * lambda)
  const mgPerMs = (sheet.injectorFlowCcMin * sheet.fuelDensityGPerCc) / 60
  return (100 * (fuelMg / mgPerMs + sheet.deadTimeMs)) / (120_000 / rpm)
}

export interface HighestDuty {
  readonly pct: number
  readonly cell: number
}

/** The cell up to the rev limit that keeps the injectors open longest; null where no target is known. */
export function highestDuty(
  sheet: EngineSheetInput,
  grid: Grid,
  valueOf: (cell: number) => number,
  lambdaOf: (rpm: number, mapKpa: number) => number,
): HighestDuty | null {
  let highest: HighestDuty | null = null
  for (let cell = 0; cell < grid.rpm.length * grid.mapKpa.length; cell += 1) {
    const rpm = grid.rpm[cell % grid.rpm.length]!
    const mapKpa = grid.mapKpa[Math.floor(cell / grid.rpm.length)]!
    if (rpm > sheet.revLimitRpm) continue
    const pct = dutyPct(sheet, rpm, mapKpa, valueOf(cell), lambdaOf(rpm, mapKpa))
    if (Number.isFinite(pct) && pct > (highest?.pct ?? -Infinity)) highest = { pct, cell }
  }
  return highest
}
