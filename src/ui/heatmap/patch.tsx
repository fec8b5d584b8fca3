/** A vehicle's evidence in small: one square a cell, darker for more seconds, hatched for none. */
import { HeatmapRect } from '@visx/heatmap'
import { scaleLinear } from '@visx/scale'
import { useId } from 'react'
import type { Grid } from '../../../shared/grid.ts'
import { toneOf } from './scale.ts'

interface PatchProps {
  readonly grid: Grid
  readonly evidenceS: readonly (number | null)[]
  readonly size?: number
}

interface Bin {
  readonly bin: number
  readonly count: number
}

export function EvidencePatch({ grid, evidenceS, size = 120 }: PatchProps) {
  const hatch = useId()
  const cols = grid.rpm.length
  const rows = grid.mapKpa.length
  const step = size / Math.max(cols, rows)
  // Columns of bins, each from the top of the table down, as the chart stacks them.
  const data = grid.rpm.map((_, col) => ({
    bin: col,
    bins: grid.mapKpa.map((_each, row): Bin => ({ bin: row, count: evidenceS[(rows - 1 - row) * cols + col] ?? 0 })),
  }))
  const known = evidenceS.filter((seconds) => (seconds ?? 0) > 0).length
  return (
    <svg
      width={step * cols}
      height={step * rows}
      role="img"
      aria-label={`${known} of ${evidenceS.length} cells have evidence`}
    >
      <defs>
        <pattern id={hatch} width="4" height="4" patternUnits="userSpaceOnUse" patternTransform="rotate(45)">
          <line x1="0" y1="0" x2="0" y2="4" stroke="var(--color-rule)" strokeWidth="1.4" />
        </pattern>
      </defs>
      <HeatmapRect
        data={data}
        xScale={scaleLinear({ domain: [0, cols], range: [0, step * cols] })}
        yScale={scaleLinear({ domain: [0, rows], range: [0, step * rows] })}
        binWidth={step}
        binHeight={step}
        gap={1}
      >
        {(heatmap) =>
          heatmap.map((column) =>
            column.map((cell) => {
              const seconds = cell.count ?? 0
              return (
                <rect
                  key={`${cell.row}-${cell.column}`}
                  x={cell.x}
                  y={cell.y}
                  width={cell.width}
                  height={cell.height}
                  fill={
                    seconds > 0 ? `var(--color-seq-${Math.max(1, toneOf('evidence', seconds) ?? 1)})` : `url(#${hatch})`
                  }
                />
              )
            }),
          )
        }
      </HeatmapRect>
    </svg>
  )
}
