/** Where the drive went on the fuel table: seconds nearest to each cell; cells of a finding are outlined. */
import { useState } from 'react'
import type { Inspection } from '../../../shared/contract/logs.ts'
import { formatNumber } from '../../lib/format.ts'
import { Heatmap, type Selection } from '../../ui/heatmap/heatmap.tsx'
import { Legend } from '../../ui/heatmap/legend.tsx'

interface DrivePathProps {
  readonly path: NonNullable<Inspection['path']>
  readonly concerned: ReadonlySet<number>
}

export function DrivePath({ path: { grid, seconds }, concerned }: DrivePathProps) {
  const [selection, setSelection] = useState<Selection | null>(null)
  const cols = grid.rpm.length
  return (
    <>
      <Heatmap
        label="Seconds of the drive in each cell"
        grid={grid}
        values={seconds.map((each) => (each > 0 ? each : null))}
        view="evidence"
        format={(value) => formatNumber(value, value < 10 ? 1 : 0)}
        none={(cell) => !(seconds[cell]! > 0)}
        selection={selection}
        onSelect={setSelection}
        preview={concerned}
        cellLabel={(cell) =>
          `${grid.rpm[cell % cols]} rpm, ${grid.mapKpa[Math.floor(cell / cols)]} kPa: ${formatNumber(seconds[cell]!, 1)} s${concerned.has(cell) ? ', part of the finding' : ''}`
        }
        snug
      />
      <Legend view="evidence" unit="seconds" />
    </>
  )
}
