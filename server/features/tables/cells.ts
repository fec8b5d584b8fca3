/** Cells of a table as they are stored, and their checksum. */
import { createHash } from 'node:crypto'
import type { Grid } from '../../../shared/grid.ts'
import { canonicalText } from '../../core/formats/table-csv.ts'

/** Float64, little-endian as every machine this runs on. */
export const encodeCells = (values: Float64Array): Uint8Array =>
  new Uint8Array(values.buffer, values.byteOffset, values.byteLength)

/** A copy, because bytes from the driver may start where no Float64Array can. */
export const decodeCells = (bytes: Uint8Array): Float64Array => new Float64Array(bytes.slice().buffer)

/** SHA-256 of the canonical text of axes and values. */
export const checksumOf = (grid: Grid, values: ArrayLike<number>): string =>
  createHash('sha256').update(canonicalText(grid, values)).digest('hex')
