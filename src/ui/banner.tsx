/** What failed, what was kept, what to do; between a heavy and a light line. */
import { CircleAlert } from 'lucide-react'
import type { ReactNode } from 'react'

export function Banner({ title, children }: { title: string; children?: ReactNode }) {
  return (
    <div role="alert" className="my-5 max-w-[44rem] border-t-2 border-b border-ink py-3">
      <p className="flex gap-2 font-semibold">
        <CircleAlert aria-hidden size={16} strokeWidth={1.75} className="mt-[3px] shrink-0" />
        {title}
      </p>
      {children ? <div className="pl-6 text-ink-quiet">{children}</div> : null}
    </div>
  )
}
