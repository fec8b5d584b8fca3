/** A fault that looks like a wrong table: a correction of one shape over the whole map is named, not spread over cells. */
import type { Grid } from '../../shared/grid.ts'

export interface Diagnosis {
  readonly kind: 'scale' | 'dead-time' | 'exhaust-leak' | 'injector-flow' | 'injector-dead-time'
  /** What was seen, with its numbers. */
  readonly detail: string
  /** What to look at on the vehicle. */
  readonly lookAt: string
}

export interface DiagnoseInput {
  readonly grid: Grid
  /** ln of fitted over flashed VE. */
  readonly correction: Float64Array
  /** Its standard deviation, ln. */
  readonly sigma: Float64Array
  readonly evidenceS: Float64Array
  /** 1 / air mass flow, s/kg; 1 / air of one filling, 1/mg. */
  readonly inverseFlow: Float64Array
  readonly inverseFilling: Float64Array
  /** ln of fuel by pulse width over fuel by table; NaN where not known. */
  readonly routeGap: Float64Array
}

const leastCells = 12
const leastColumns = 4
/** A table is wrong by hand, cell by cell, by about this much; a shape must stand out of it. */
const handworkSd = 0.02

interface Line {
  readonly level: number
  readonly slope: number
  /** Share of the scatter that the slope explains. */
  readonly explained: number
  /** From the smallest to the largest x, in y. */
  readonly reach: number
  readonly slopeSd: number
}

/** Weighted straight line y = level + slope · (x − mean x). */
export function weightedLine(x: readonly number[], y: readonly number[], weight: readonly number[]): Line {
  const total = weight.reduce((sum, w) => sum + w, 0)
  const mean = (values: readonly number[]) => values.reduce((sum, value, i) => sum + weight[i]! * value, 0) / total
  const meanX = mean(x)
  const meanY = mean(y)
  let xx = 0
  let xy = 0
  let yy = 0
  for (let i = 0; i < x.length; i += 1) {
    xx += weight[i]! * (x[i]! - meanX) ** 2
    xy += weight[i]! * (x[i]! - meanX) * (y[i]! - meanY)
    yy += weight[i]! * (y[i]! - meanY) ** 2
  }
  const slope = xx > 0 ? xy / xx : 0
  return {
    level: meanY,
    slope,
    explained: yy > 0 ? (slope * xy) / yy : 0,
    reach: slope * (Math.max(...x) - Math.min(...x)),
    slopeSd: xx > 0 ? 1 / Math.sqrt(xx) : Infinity,
  }
}

const percent = (ln: number): string => `${ln >= 0 ? '+' : '−'}${Math.abs(100 * (Math.exp(ln) - 1)).toFixed(1)} %`

/** Most telling first; empty where the correction has no shape of its own. */
export function diagnose(input: DiagnoseInput): Diagnosis[] {
  const cells = [...input.evidenceS.keys()].filter(
    (cell) => input.evidenceS[cell]! >= 1 && Number.isFinite(input.inverseFlow[cell]),
  )
  const columns = new Set(cells.map((cell) => cell % input.grid.rpm.length))
  if (cells.length < leastCells || columns.size < leastColumns) return []
  return [...ofInjectors(input, cells), ...ofCorrection(input, cells)]
}

function ofCorrection(input: DiagnoseInput, cells: readonly number[]): Diagnosis[] {
  const pick = (values: Float64Array) => cells.map((cell) => values[cell]!)
  const y = pick(input.correction)
  const weight = pick(input.sigma).map((sigma) => 1 / (sigma ** 2 + handworkSd ** 2))
  const byFlow = weightedLine(pick(input.inverseFlow), y, weight)
  const byFilling = weightedLine(pick(input.inverseFilling), y, weight)
  const shape = byFlow.explained > byFilling.explained ? byFlow : byFilling
  const isClear = shape.explained >= 0.6 && Math.abs(shape.reach) >= 0.04 && Math.abs(shape.slope) > 4 * shape.slopeSd
  if (isClear && shape === byFlow && shape.slope > 0) {
    return [
      {
        kind: 'exhaust-leak',
        detail: `The correction grows as 1 / exhaust flow: ${percent(shape.reach)} from full flow to idle, which explains ${(100 * shape.explained).toFixed(0)} % of its scatter.`,
        lookAt:
          'A leak before the sensor lets air in at low flow and reads lean. Check gaskets and joints up to the sensor before you take these cells; the engine may not be lean at all.',
      },
    ]
  }
  if (isClear && shape === byFilling) {
    return [
      {
        kind: 'dead-time',
        detail: `The correction grows as 1 / injected quantity: ${percent(shape.reach)} from the largest to the smallest, which explains ${(100 * shape.explained).toFixed(0)} % of its scatter.`,
        lookAt:
          'The injectors’ dead time in the controller is probably off, and the battery voltage may matter. Correct it there; then the table needs less.',
      },
    ]
  }
  const scatter = Math.sqrt(
    y.reduce((sum, value, i) => sum + weight[i]! * (value - byFlow.level) ** 2, 0) / weight.reduce((a, b) => a + b, 0),
  )
  if (Math.abs(byFlow.level) >= 0.05 && scatter <= 0.25 * Math.abs(byFlow.level)) {
    return [
      {
        kind: 'scale',
        detail: `Nearly every cell wants the same ${percent(byFlow.level)} (scatter ${(100 * scatter).toFixed(1)} %).`,
        lookAt:
          'One factor over the whole map is rarely the engine: check displacement, injector flow, fuel pressure and the stoichiometric ratio in the controller.',
      },
    ]
  }
  return []
}

/** Where pulse width is logged: do the sheet's injector data and the controller's agree? */
function ofInjectors(input: DiagnoseInput, all: readonly number[]): Diagnosis[] {
  const cells = all.filter((cell) => Number.isFinite(input.routeGap[cell]))
  if (cells.length < leastCells) return []
  const gap = cells.map((cell) => input.routeGap[cell]!)
  const line = weightedLine(
    cells.map((cell) => input.inverseFilling[cell]!),
    gap,
    cells.map((cell) => Math.min(30, input.evidenceS[cell]!)),
  )
  if (line.explained >= 0.6 && Math.abs(line.reach) >= 0.04) {
    return [
      {
        kind: 'injector-dead-time',
        detail: `Fuel by pulse width and fuel by the table part by ${percent(line.reach)} towards small injections.`,
        lookAt:
          'The dead time on the engine sheet and the one in the controller differ. Compare the two at battery voltage.',
      },
    ]
  }
  if (Math.abs(line.level) < 0.05) return []
  return [
    {
      kind: 'injector-flow',
      detail: `Fuel by pulse width is ${percent(line.level)} against fuel by the table, over the whole map.`,
      lookAt:
        'Injector flow or fuel pressure on the engine sheet does not match what the controller reckons with. Compare flow, pressure and density.',
    },
  ]
}
