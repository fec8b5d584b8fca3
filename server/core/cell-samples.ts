/** Every reading that spoke for a cell: how far it was from the fit, where in the cell and when. */
import type { Grid } from '../../shared/grid.ts'
import type { Drive, EngineFacts } from './drive.ts'
import { burnWith, emptyPrediction, predictInto } from './model/forward.ts'
import type { MixturePath } from './model/path.ts'
import { prepare, Role } from './model/prepare.ts'

export interface CellSample {
  readonly timeS: number
  /** Where the mixture was burnt. */
  readonly rpm: number
  readonly mapKpa: number
  readonly lambda: number
  /** The VE that would explain the reading by itself, %. */
  readonly ve: number
  /** Share of the reading that is this cell's, 0 to 1. */
  readonly share: number
}

/** A sample this little in the cell does not speak for it. */
const leastShare = 0.1

/** In the order of time; thinned evenly to at most `most`. */
export function cellSamples(
  drive: Drive,
  engine: EngineFacts,
  grid: Grid,
  fitted: Float64Array,
  path: MixturePath,
  cell: number,
  most: number,
): CellSample[] {
  const prepared = prepare(drive, engine, grid)
  const burn = burnWith(prepared, fitted, engine.stoichAfr)
  const { clear, source, lnPhi } = predictInto(emptyPrediction(prepared.n), prepared, burn, path)
  const found: CellSample[] = []
  for (let i = 0; i < prepared.n; i += 1) {
    if (prepared.role[i] !== Role.speaks || clear[i] === 0) continue
    const from = source[i]!
    for (let k = 4 * from; k < 4 * from + 4; k += 1) {
      if (prepared.cells[k] !== cell || prepared.weights[k]! < leastShare) continue
      const miss = Math.exp(prepared.lnLambda[i]! + lnPhi[i]!)
      found.push({
        timeS: drive.timeS[i]!,
        rpm: drive.rpm[from]!,
        mapKpa: drive.mapKpa[from]!,
        lambda: drive.lambda[i]!,
        ve: fitted[cell]! * miss,
        share: prepared.weights[k]!,
      })
    }
  }
  const every = Math.max(1, Math.ceil(found.length / most))
  return found.filter((_, i) => i % every === 0)
}
