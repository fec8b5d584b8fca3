/** From a value to one of eleven tones. Quantised, never blended, so that text on every tone keeps its contrast. */
import { scaleThreshold } from 'd3-scale'

const classes = Array.from({ length: 11 }, (_, i) => i)
const steps = (edges: readonly number[], range: readonly number[] = classes) =>
  scaleThreshold<number, number>()
    .domain([...edges])
    .range([...range])

/** VE in %: 36 and up in steps of 6. */
export const magnitudeEdges = [42, 48, 54, 60, 66, 72, 78, 84, 90, 96] as const
/** Change in %, minus leaner: neutral within ±1. */
export const changeEdges = [-16, -12, -8, -4, -1, 1, 4, 8, 12, 16] as const
/** Seconds, logarithmic from 1 to 100. */
export const evidenceEdges = [1, 1.7, 2.8, 4.6, 7.7, 12.9, 21.5, 35.9, 59.9, 100] as const
/** ± % of the value. */
export const uncertaintyEdges = [0.5, 1, 1.5, 2, 3, 4, 6] as const
/** Lambda: neutral from 0.98 to 1.02, copper is richer, slate leaner. */
export const lambdaEdges = [0.78, 0.83, 0.88, 0.93, 0.98, 1.02, 1.06, 1.1, 1.14, 1.18] as const

/** Days since the last drive. */
export const ageEdges = [2, 4, 8, 15, 31, 61, 92, 183, 365, 730] as const

export type HeatmapView = 'magnitude' | 'change' | 'evidence' | 'uncertainty' | 'misfit' | 'lambda' | 'age'

const change = steps(changeEdges)
const scales: Record<HeatmapView, (value: number) => number> = {
  magnitude: steps(magnitudeEdges),
  change,
  misfit: change,
  evidence: steps(evidenceEdges),
  uncertainty: steps(uncertaintyEdges, [0, 1, 3, 4, 6, 7, 9, 10]),
  age: steps(ageEdges),
  lambda: steps(lambdaEdges, [10, 9, 8, 7, 6, 5, 4, 3, 2, 1, 0]),
}

const edges: Record<HeatmapView, readonly number[]> = {
  magnitude: magnitudeEdges,
  change: changeEdges,
  misfit: changeEdges,
  evidence: evidenceEdges,
  uncertainty: uncertaintyEdges,
  age: ageEdges,
  lambda: lambdaEdges,
}
export const edgesOf = (view: HeatmapView): readonly number[] => edges[view]

/** Which family of tones a view uses. */
export const familyOf = (view: HeatmapView): 'seq' | 'div' =>
  view === 'change' || view === 'misfit' || view === 'lambda' ? 'div' : 'seq'

/** Tone of a value, 0 to 10; null where there is none. */
export function toneOf(view: HeatmapView, value: number | null): number | null {
  return value === null || !Number.isFinite(value) ? null : scales[view](value)
}

/** The tones as a legend shows them, low to high by value, with the edge that begins each. */
export function wedgeOf(view: HeatmapView): { tone: number; from: number | null }[] {
  const list = edges[view]
  const middle = [list[0]! - 1, ...list]
  return middle.map((value, i) => ({ tone: scales[view](value), from: i === 0 ? null : list[i - 1]! }))
}
