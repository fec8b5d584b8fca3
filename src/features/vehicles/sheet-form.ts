/** The engine sheet as it is typed: texts with a point or a comma, and what they become. */
import type { EngineSheetInput } from '../../../shared/contract/vehicles.ts'

export type NumberName = Exclude<keyof EngineSheetInput, 'boosted' | 'fuel'>

export interface SheetDraft {
  readonly numbers: Record<NumberName, string>
  readonly boosted: boolean
  readonly fuel: EngineSheetInput['fuel']
}

/**
 * Stoichiometric ratio and density of fuels: compositions of 40 CFR 1065.655 and EC 692/2008 (from memory) through
 * the formula of the reference page; densities of the AFDC table and blends by mass.
 */
export const fuels: Readonly<
  Record<Exclude<EngineSheetInput['fuel'], 'custom'>, { name: string; stoichAfr: number; densityGPerCc: number }>
> = {
  petrol: { name: 'Petrol without alcohol', stoichAfr: 14.6, densityGPerCc: 0.745 },
  e5: { name: 'Petrol, 5 % ethanol', stoichAfr: 14.3, densityGPerCc: 0.747 },
  e10: { name: 'Petrol, 10 % ethanol', stoichAfr: 14.01, densityGPerCc: 0.749 },
  e85: { name: 'Ethanol, 15 % petrol', stoichAfr: 9.8, densityGPerCc: 0.783 },
  ethanol: { name: 'Ethanol', stoichAfr: 9.0, densityGPerCc: 0.789 },
  methanol: { name: 'Methanol', stoichAfr: 6.47, densityGPerCc: 0.794 },
  lpg: { name: 'LPG', stoichAfr: 15.64, densityGPerCc: 0.506 },
}

export const emptySheet: SheetDraft = {
  numbers: {
    displacementL: '',
    cylinders: '',
    revLimitRpm: '',
    injectorFlowCcMin: '',
    injectorPressureKpa: '300',
    deadTimeMs: '1',
    stoichAfr: '14.01',
    fuelDensityGPerCc: '0.749',
    lambdaLow: '0.65',
    lambdaHigh: '1.36',
  },
  boosted: false,
  fuel: 'e10',
}

export const draftOf = (sheet: EngineSheetInput): SheetDraft => ({
  numbers: Object.fromEntries(
    Object.keys(emptySheet.numbers).map((name) => [name, String(sheet[name as NumberName])]),
  ) as SheetDraft['numbers'],
  boosted: sheet.boosted,
  fuel: sheet.fuel,
})

/** Numbers may be typed with a comma; what is no number becomes NaN and is refused by the schema. */
export const sheetOf = (draft: SheetDraft): EngineSheetInput => ({
  ...(Object.fromEntries(
    Object.entries(draft.numbers).map(([name, text]) => [
      name,
      text.trim() === '' ? Number.NaN : Number(text.trim().replace(',', '.')),
    ]),
  ) as Record<NumberName, number>),
  boosted: draft.boosted,
  fuel: draft.fuel,
})
