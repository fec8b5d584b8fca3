/** What the tones mean: the wedge with its class edges, the unit, and the marks. */
import { Equal, Pencil, Pin, Shield } from 'lucide-react'
import { formatNumber } from '../../lib/format.ts'
import { familyOf, wedgeOf, type HeatmapView } from './scale.ts'

const small = { size: 12, strokeWidth: 2.25, 'aria-hidden': true } as const

export function Legend({
  view,
  unit,
  marks = false,
  none = true,
}: {
  view: HeatmapView
  unit: string
  marks?: boolean
  none?: boolean
}) {
  const digits = view === 'lambda' ? 2 : view === 'uncertainty' ? 1 : 0
  return (
    <div className="mt-3 flex flex-wrap items-start gap-x-8 gap-y-2 text-small text-ink-quiet">
      <div className="flex pb-5" role="img" aria-label={`Scale in ${unit}`}>
        {wedgeOf(view).map(({ tone, from }, i) => (
          <i
            key={from ?? 'least'}
            className="relative mr-0.5 block h-3 w-7 border border-rule not-italic phone:w-6"
            style={{ background: `var(--color-${familyOf(view)}-${tone})` }}
          >
            {from !== null && i % 2 === 0 ? (
              <span className="absolute top-3.5 left-0 -translate-x-1/2 whitespace-nowrap">
                {formatNumber(from, digits)}
              </span>
            ) : null}
          </i>
        ))}
      </div>
      <span>{unit}</span>
      {marks ? (
        <ul className="flex flex-wrap gap-x-4 gap-y-1">
          <li className="flex items-center gap-1.5">
            <i aria-hidden className="inline-block size-2.5 border-[1.5px] border-current" />
            open
          </li>
          <li className="flex items-center gap-1.5">
            <Shield {...small} />
            held by the lean guard
          </li>
          <li className="flex items-center gap-1.5">
            <Pencil {...small} />
            by hand
          </li>
          <li className="flex items-center gap-1.5">
            <Pin {...small} />
            pinned
          </li>
          <li className="flex items-center gap-1.5">
            <Equal {...small} />
            kept
          </li>
          <li className="flex items-center gap-1.5">
            <i aria-hidden className="h-[3px] w-5 bg-current opacity-60" />
            evidence
          </li>
        </ul>
      ) : null}
      {none ? (
        <span className="flex items-center gap-1.5">
          <i aria-hidden className="inline-block h-3 w-5 border border-rule [background:var(--hatch)]" />
          no evidence
        </span>
      ) : null}
    </div>
  )
}
