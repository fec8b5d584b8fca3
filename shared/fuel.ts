/** Stoichiometry of fuels: the ratio from composition, and blends by mass. */

/** A fuel as CH_y O_z, and its liquid density. */
export interface Fuel {
  readonly name: string
  /** Hydrogen to carbon, by atoms. */
  readonly hydrogen: number
  /** Oxygen to carbon, by atoms. */
  readonly oxygen: number
  readonly densityGPerCc: number
}

/** Molar masses, g/mol; air is 1 O2 with 3.773 of atmospheric nitrogen at 28.16 (Heywood 1988, section 3.2, from memory). */
const carbonG = 12.011
const hydrogenG = 1.008
const oxygenG = 15.9994
const airPerOxygenG = 2 * oxygenG + 3.773 * 28.16

/** Stoichiometric air-fuel ratio by mass of CH_y O_z. */
export const stoichiometricAfr = ({ hydrogen, oxygen }: Pick<Fuel, 'hydrogen' | 'oxygen'>): number =>
  ((1 + hydrogen / 4 - oxygen / 2) * airPerOxygenG) / (carbonG + hydrogenG * hydrogen + oxygenG * oxygen)

export interface Blend {
  readonly massFraction: number
  readonly densityGPerCc: number
  readonly stoichAfr: number
}

/**
 * A blend of a base with a part of another fuel by volume. Density mixes by volume, the air-fuel ratio by mass.
 * @param volumeFraction  of the added fuel, 0 to 1.
 */
export function blend(
  base: { readonly densityGPerCc: number; readonly stoichAfr: number },
  added: { readonly densityGPerCc: number; readonly stoichAfr: number },
  volumeFraction: number,
): Blend {
  const densityGPerCc = volumeFraction * added.densityGPerCc + (1 - volumeFraction) * base.densityGPerCc
  const massFraction = (volumeFraction * added.densityGPerCc) / densityGPerCc
  return {
    massFraction,
    densityGPerCc,
    stoichAfr: massFraction * added.stoichAfr + (1 - massFraction) * base.stoichAfr,
  }
}

/** Compositions of 40 CFR 1065.655 and common handbooks (from memory); densities of the US alternative fuels data table. */
export const pureFuels = {
  petrol: { name: 'Petrol without alcohol', hydrogen: 1.87, oxygen: 0, densityGPerCc: 0.745 },
  ethanol: { name: 'Ethanol', hydrogen: 3, oxygen: 0.5, densityGPerCc: 0.7894 },
  methanol: { name: 'Methanol', hydrogen: 4, oxygen: 1, densityGPerCc: 0.7945 },
  lpg: { name: 'LPG', hydrogen: 2.64, oxygen: 0, densityGPerCc: 0.5057 },
} as const satisfies Record<string, Fuel>
