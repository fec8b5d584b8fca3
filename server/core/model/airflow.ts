/** Air through the engine by the ideal gas law. */

/** J/(kg K): universal gas constant over the molar mass of dry air. */
const gasConstantAir = 287.05

/** Air mass flow for each % of VE, kg/s. */
export const airPerVe = (mapKpa: number, displacementL: number, rpm: number, intakeC: number): number =>
  ((mapKpa / 100) * displacementL * (rpm / 120)) / (gasConstantAir * (intakeC + 273.15))

/** Air mass flow, kg/s. @param vePct VE in %. */
export const airFlowKgS = (
  vePct: number,
  mapKpa: number,
  displacementL: number,
  rpm: number,
  intakeC: number,
): number => vePct * airPerVe(mapKpa, displacementL, rpm, intakeC)
