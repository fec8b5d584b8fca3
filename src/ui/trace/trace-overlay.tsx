/** Over a plot: hatched stretches, marks to jump to, the cursor that all plots share, and the pointer's drag. */
import { useState, type PointerEvent } from 'react'

export interface Shade {
  readonly fromS: number
  readonly toS: number
  readonly words: string
}

export interface OverlayProps {
  /** Ends of the axis, s. */
  readonly from: number
  readonly to: number
  readonly margin: { readonly top: number; readonly right: number; readonly bottom: number; readonly left: number }
  /** Stretches that cannot teach. */
  readonly shades: readonly Shade[]
  readonly marks: readonly Shade[]
  /** s; null where nothing is pointed at. */
  readonly cursorS: number | null
  readonly onCursor: (second: number) => void
  readonly onStretch: (from: number, to: number) => void
}

interface Drag {
  readonly startS: number
  readonly endS: number
  readonly moves: boolean
}

/** Shorter drags are a click. */
const leastDragShare = 0.01

export function TraceOverlay({ from, to, margin, shades, marks, cursorS, onCursor, onStretch }: OverlayProps) {
  const [drag, setDrag] = useState<Drag | null>(null)
  const length = to - from
  const place = (second: number) => `${(100 * (second - from)) / length}%`
  const span = (fromS: number, toS: number) => {
    const [left, right] = [Math.max(from, Math.min(fromS, toS)), Math.min(to, Math.max(fromS, toS))]
    return { left: place(left), width: `${Math.max(0.15, (100 * (right - left)) / length)}%` }
  }
  const visible = (list: readonly Shade[]) => list.filter(({ fromS, toS }) => toS >= from && fromS <= to)
  const secondAt = (event: PointerEvent<HTMLDivElement>) => {
    const box = event.currentTarget.getBoundingClientRect()
    return from + (length * (event.clientX - box.left)) / box.width
  }
  const end = () => {
    if (drag && Math.abs(drag.endS - drag.startS) > leastDragShare * length) {
      const by = drag.startS - drag.endS
      if (drag.moves) onStretch(from + by, to + by)
      else onStretch(Math.min(drag.startS, drag.endS), Math.max(drag.startS, drag.endS))
    }
    setDrag(null)
  }
  return (
    <div
      aria-hidden
      className="absolute cursor-crosshair touch-pan-y print:hidden"
      style={margin}
      onPointerDown={(event) => {
        event.currentTarget.setPointerCapture(event.pointerId)
        const startS = secondAt(event)
        setDrag({ startS, endS: startS, moves: event.shiftKey })
      }}
      onPointerMove={(event) => {
        const second = secondAt(event)
        onCursor(second)
        if (drag) setDrag({ ...drag, endS: second })
      }}
      onPointerUp={end}
      onPointerCancel={() => setDrag(null)}
    >
      {visible(shades).map((shade) => (
        <i
          key={`${shade.fromS} ${shade.words}`}
          className="absolute inset-y-0 opacity-60 [background:var(--hatch)]"
          style={span(shade.fromS, shade.toS)}
        />
      ))}
      {visible(marks).map((mark) => (
        <i
          key={`${mark.fromS} ${mark.words}`}
          className="absolute top-0 h-1 bg-copper"
          style={span(mark.fromS, mark.toS)}
        />
      ))}
      {drag && !drag.moves ? (
        <i className="absolute inset-y-0 bg-copper-wash opacity-70" style={span(drag.startS, drag.endS)} />
      ) : null}
      {cursorS !== null && cursorS >= from && cursorS <= to ? (
        <i className="absolute inset-y-0 w-px bg-ink" style={{ left: place(cursorS) }} />
      ) : null}
    </div>
  )
}
