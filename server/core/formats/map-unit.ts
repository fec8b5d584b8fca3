/** Units a table's MAP axis is written in; inside the product it is always kPa absolute. */

export const mapUnits = ['kPa', 'bar', 'psi'] as const
export type MapUnit = (typeof mapUnits)[number]

/** kPa in one of each. psi by its definition, 0.45359237 kg · 9.80665 m/s² / (0.0254 m)² (NIST SP 811). */
export const kpaPer: Readonly<Record<MapUnit, number>> = { kPa: 1, bar: 100, psi: 6.894757293168361 }

/** Places of a converted axis: fine enough that breakpoints given to 0.001 kPa read back exactly. */
const placesOf: Readonly<Record<MapUnit, number | null>> = { kPa: null, bar: 5, psi: 5 }

/** A breakpoint as text with a decimal point: kPa as it is, other units to five places. */
export function writeMap(kpa: number, unit: MapUnit): string {
  const places = placesOf[unit]
  return String(places === null ? kpa : Number((kpa / kpaPer[unit]).toFixed(places)))
}

/** A breakpoint in kPa; converted ones to 0.001 kPa, which is finer than any sensor. */
export const readMap = (value: number, unit: MapUnit): number =>
  unit === 'kPa' ? value : Math.round(value * kpaPer[unit] * 1000) / 1000

/** The unit that a table's corner names; kPa where it names none. */
export function mapUnitOf(corner: string): MapUnit {
  if (/\bbar\b/i.test(corner)) return 'bar'
  return /\bpsi\b/i.test(corner) ? 'psi' : 'kPa'
}
