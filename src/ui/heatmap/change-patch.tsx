/** The change of a table in small: one square a cell, in the tone of its change; what did not change is left as paper. */
import { toneOf } from './scale.ts'

interface ChangePatchProps {
  /** In %, row by MAP ascending; 0 where nothing changed. */
  readonly changePct: readonly (number | null)[]
  readonly cols: number
  readonly size?: number
}

/** Small screens, small words: a picture's text is its count. */
function label(changePct: readonly (number | null)[]): string {
  const changed = changePct.filter((change) => change !== 0).length
  if (changed === 0) return 'No cell changes'
  const up = changePct.filter((change) => (change ?? 0) > 0).length
  return `${changed} of ${changePct.length} cells change: ${up} up, ${changed - up} down`
}

export function ChangePatch({ changePct, cols, size = 48 }: ChangePatchProps) {
  const rows = changePct.length / cols
  const step = size / Math.max(cols, rows)
  return (
    <svg width={step * cols} height={step * rows} role="img" aria-label={label(changePct)}>
      <rect width={step * cols} height={step * rows} fill="var(--color-sunk)" />
      {changePct.map((change, cell) => {
        const tone = change === 0 ? null : toneOf('change', change)
        return tone === null ? null : (
          <rect
            key={cell}
            x={(cell % cols) * step}
            y={(rows - 1 - Math.floor(cell / cols)) * step}
            width={step}
            height={step}
            // Below one per cent a change is neutral on the scale, yet it is a change: it gets the ink's outline.
            fill={tone === 5 ? 'var(--color-rule-strong)' : `var(--color-div-${tone})`}
          />
        )
      })}
    </svg>
  )
}
