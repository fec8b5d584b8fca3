/** The engine sheet as it is typed: texts with a point or a comma, and what they become. */
import { blend, pureFuels, stoichiometricAfr, type Fuel } from '../../../shared/fuel.ts'
import type { EngineSheetInput } from '../../../shared/contract/vehicles.ts'

export type NumberName = Exclude<keyof EngineSheetInput, 'boosted' | 'fuel'>

export interface SheetDraft {
  readonly numbers: Record<NumberName, string>
  readonly boosted: boolean
  readonly fuel: EngineSheetInput['fuel']
}

interface SheetFuel {
  readonly name: string
  readonly stoichAfr: number
  readonly densityGPerCc: number
}

const pure = (fuel: Fuel): SheetFuel => ({
  name: fuel.name,
  stoichAfr: stoichiometricAfr(fuel),
  densityGPerCc: fuel.densityGPerCc,
})
const withEthanol = (name: string, volumeFraction: number): SheetFuel => ({
  name,
  ...blend(pure(pureFuels.petrol), pure(pureFuels.ethanol), volumeFraction),
})

/** What the choice of a fuel fills in. */
export const fuels: Readonly<Record<Exclude<EngineSheetInput['fuel'], 'custom'>, SheetFuel>> = {
  petrol: pure(pureFuels.petrol),
  e5: withEthanol('Petrol, 5 % ethanol', 0.05),
  e10: withEthanol('Petrol, 10 % ethanol', 0.1),
  e85: withEthanol('Ethanol, 15 % petrol', 0.85),
  ethanol: pure(pureFuels.ethanol),
  methanol: pure(pureFuels.methanol),
  lpg: pure(pureFuels.lpg),
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
