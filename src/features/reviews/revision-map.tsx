/** The revision's table as a heatmap: change against the parent, or the values themselves. */
import { useState } from 'react'
import type { Revision } from '../../../shared/contract/tables.ts'
import { formatNumber, formatSigned } from '../../lib/format.ts'
import { Heatmap, type HeatmapMark, type HeatmapView } from '../../ui/heatmap/heatmap.tsx'
import { Legend } from '../../ui/heatmap/legend.tsx'

interface RevisionMapProps {
  readonly revision: Revision
  readonly cell: number | null
  readonly onSelect: (cell: number | null) => void
  readonly cellName: (cell: number) => string
}

const marks: Record<string, HeatmapMark> = {
  held: 'held',
  pinned: 'pinned',
  kept: 'kept',
  'by-hand': 'by-hand',
  open: 'open',
}

export function RevisionMap({ revision, cell, onSelect, cellName }: RevisionMapProps) {
  const { parentValues, provenance, kind } = revision
  const [asChange, setAsChange] = useState(parentValues !== null)
  const change = asChange && parentValues !== null
  const view: HeatmapView = change ? 'change' : kind === 've' ? 'magnitude' : 'lambda'
  const values = change
    ? revision.values.map((value, i) => ((value ?? Number.NaN) / (parentValues[i] ?? Number.NaN) - 1) * 100)
    : revision.values
  const none = (index: number) => provenance !== null && (provenance.evidenceS[index] ?? 0) <= 0
  const digits = kind === 've' ? 1 : 2
  const format = (value: number) => (change ? formatSigned(value, 1) : formatNumber(value, digits))
  return (
    <>
      {parentValues ? (
        <button
          type="button"
          className="mb-3 cursor-pointer text-copper underline underline-offset-3"
          onClick={() => setAsChange(!asChange)}
        >
          {change ? 'Show the values' : 'Show the change'}
        </button>
      ) : null}
      <Heatmap
        label={change ? 'Change of every cell in percent' : 'Value of every cell'}
        grid={revision.grid}
        values={values}
        view={view}
        format={format}
        formatNarrow={(value) =>
          change ? formatSigned(value, 0) : formatNumber(value, kind === 've' ? 0 : 2).replace(/^0/, '')
        }
        none={none}
        mark={(index) => (provenance ? (marks[provenance.decision[index] ?? 'none'] ?? null) : null)}
        selection={cell === null ? null : { anchor: cell, focus: cell }}
        onSelect={(selection) => onSelect(selection?.focus ?? null)}
        cellLabel={(index) =>
          `${cellName(index)}: ${format(values[index] ?? Number.NaN)}${none(index) ? ', no evidence' : ''}`
        }
        snug
      />
      <Legend
        marks={provenance !== null}
        view={view}
        unit={change ? '%, minus is leaner, plus is richer' : kind === 've' ? 'VE, %' : 'lambda'}
      />
    </>
  )
}
