/** The table inside an exported revision in JSON; everything else in the file is left alone. */
import { z } from 'zod'
import { GridShape } from '../../../shared/wire.ts'
import type { TableReading } from './read-table.ts'

const RevisionFile = z.object({
  kind: z.enum(['ve', 'target']),
  grid: GridShape,
  values: z.array(z.number()),
})

const no = (detail: string): TableReading => ({
  ok: false,
  problems: [{ row: null, col: null, text: '', detail }],
})

/** What a value can be, by kind: VE in %, lambda. */
const bounds = { ve: [1, 200], target: [0.5, 1.6] } as const

const rises = (axis: readonly number[]) => axis.every((each, i) => i === 0 || each > axis[i - 1]!)

export function readRevisionJson(text: string, kind: 've' | 'target'): TableReading {
  let parsed: z.infer<typeof RevisionFile>
  try {
    parsed = RevisionFile.parse(JSON.parse(text))
  } catch {
    return no('It looks like JSON but is no exported revision: kind, grid and values are needed.')
  }
  const { grid, values } = parsed
  if (parsed.kind !== kind)
    return no(parsed.kind === 've' ? 'This file holds a fuel table.' : 'This file holds a target table.')
  if (!rises(grid.rpm) || !rises(grid.mapKpa)) return no('The axes in this file do not rise.')
  if (values.length !== grid.rpm.length * grid.mapKpa.length)
    return no(`The file has ${values.length} values where its axes make ${grid.rpm.length * grid.mapKpa.length} cells.`)
  const [low, high] = bounds[kind]
  const outside = values.find((value) => value < low || value > high)
  if (outside !== undefined) return no(`A value lies between ${low} and ${high}; here one is ${outside}.`)
  return { ok: true, grid, values: Float64Array.from(values), notes: [], halfPlace: 0 }
}
