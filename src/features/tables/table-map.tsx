/** A table as a heatmap to read. */
import { useState } from 'react'
import type { TableKind } from '../../../shared/contract/tables.ts'
import type { Grid } from '../../../shared/grid.ts'
import { formatNumber } from '../../lib/format.ts'
import { Heatmap, type Selection } from '../../ui/heatmap/heatmap.tsx'
import { Legend } from '../../ui/heatmap/legend.tsx'

interface TableMapProps {
  readonly kind: TableKind
  readonly grid: Grid
  readonly values: readonly (number | null)[]
  readonly label: string
}

export function TableMap({ kind, grid, values, label }: TableMapProps) {
  const [selection, setSelection] = useState<Selection | null>(null)
  const digits = kind === 've' ? 1 : 2
  const cols = grid.rpm.length
  return (
    <>
      <Heatmap
        label={label}
        grid={grid}
        values={values}
        view={kind === 've' ? 'magnitude' : 'lambda'}
        format={(value) => formatNumber(value, digits)}
        formatNarrow={(value) => formatNumber(value, kind === 've' ? 0 : 2).replace(/^0/, '')}
        none={() => false}
        selection={selection}
        onSelect={setSelection}
        cellLabel={(cell) =>
          `${grid.rpm[cell % cols]} rpm, ${grid.mapKpa[Math.floor(cell / cols)]} kPa: ${formatNumber(values[cell] ?? Number.NaN, digits)}`
        }
        snug
      />
      <Legend view={kind === 've' ? 'magnitude' : 'lambda'} unit={kind === 've' ? 'VE, %' : 'lambda'} none={false} />
    </>
  )
}
