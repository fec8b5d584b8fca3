/** Nothing here yet: a hatched patch, a sentence, one button. */
import type { ReactNode } from 'react'

export function Empty({ title, children, action }: { title: string; children: ReactNode; action?: ReactNode }) {
  return (
    <div className="flex flex-wrap items-start gap-8 pt-8">
      <div aria-hidden className="grid size-28 shrink-0 grid-cols-4 gap-0.5">
        {Array.from({ length: 16 }, (_, i) => (
          <i key={i} className="[background:var(--hatch)]" />
        ))}
      </div>
      <div className="max-w-(--measure)">
        <h2 className="text-head font-semibold">{title}</h2>
        <div className="mt-1 text-ink-quiet">{children}</div>
        {action ? <div className="mt-4">{action}</div> : null}
      </div>
    </div>
  )
}
