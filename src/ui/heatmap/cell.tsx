/** One cell of the heatmap: number, tone, decision mark and evidence rule. Drawn again only when one of them changes. */
import { Equal, Pencil, Pin, Shield } from 'lucide-react'
import { memo, type ReactNode } from 'react'

export type HeatmapMark = 'open' | 'held' | 'pinned' | 'by-hand' | 'kept'

interface CellProps {
  readonly cell: number
  readonly text: string | null
  /** Shorter text for a phone's narrow cells; null where a phone shows the tone alone. */
  readonly narrow: string | null
  readonly label: string
  /** Name of the tone, such as seq-4; null is hatched. */
  readonly tone: string | null
  readonly mark: HeatmapMark | null
  /** Width of the evidence rule, %, 0 for none. */
  readonly rule: number
  readonly selected: boolean
  readonly tabbable: boolean
  readonly preview: boolean
  /** What is being typed, in place of the number. */
  readonly entry?: ReactNode
}

const icon = { size: 11, strokeWidth: 2.25, 'aria-hidden': true, className: 'mk absolute top-1 left-1' } as const

function Mark({ mark }: { mark: HeatmapMark }) {
  if (mark === 'open')
    return <i aria-hidden className="mk absolute top-[5px] left-[5px] size-[7px] border-[1.5px] border-current" />
  if (mark === 'held') return <Shield {...icon} />
  if (mark === 'pinned') return <Pin {...icon} />
  if (mark === 'by-hand') return <Pencil {...icon} />
  return <Equal {...icon} />
}

export const Cell = memo(function Cell(props: CellProps) {
  const { cell, text, narrow, label, tone, mark, rule, selected, tabbable, preview, entry } = props
  return (
    <td
      role="gridcell"
      data-cell={cell}
      tabIndex={tabbable ? 0 : -1}
      aria-selected={selected}
      aria-label={label}
      className={`cell ${tone === null ? 'none' : ''} ${preview ? 'preview' : ''}`}
      style={tone ? { background: `var(--color-${tone})`, color: `var(--color-on-${tone})` } : undefined}
    >
      {mark ? <Mark mark={mark} /> : null}
      {entry ??
        (text === null ? null : (
          <>
            <span className="phone:hidden">{text}</span>
            {narrow === null ? null : <span className="hidden phone:inline">{narrow}</span>}
          </>
        ))}
      {rule > 0 ? (
        <i
          aria-hidden
          className="ev absolute bottom-0 left-0 h-[3px] bg-current opacity-60"
          style={{ width: `${rule}%` }}
        />
      ) : null}
    </td>
  )
})
