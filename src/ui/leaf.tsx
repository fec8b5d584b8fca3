/** A page: text block, margin rule, outer margin; its opening sentence; its sections with the notes beside them. */
import type { ReactNode } from 'react'

export const Leaf = ({ children }: { children: ReactNode }) => <main className="leaf">{children}</main>

interface PageHeadProps {
  /** What this page is, above the conclusion. */
  readonly folio?: ReactNode
  /** The conclusion, a sentence. */
  readonly title: string
  readonly lead?: ReactNode
  readonly actions?: ReactNode
}

export function PageHead({ folio, title, lead, actions }: PageHeadProps) {
  return (
    <header className="entry">
      <div>
        {folio ? <div className="flex flex-wrap gap-x-5 text-ink-faint">{folio}</div> : null}
        <h1 className="mt-1 text-title font-semibold">{title}</h1>
        {lead ? (
          <p className="mt-2 max-w-[72ch] text-head text-balance text-ink-quiet phone:text-read">{lead}</p>
        ) : null}
        {actions ? <div className="mt-6 flex flex-wrap items-center gap-3">{actions}</div> : null}
      </div>
    </header>
  )
}

interface EntryProps {
  readonly title?: string
  /** A few words beside the title. */
  readonly note?: string
  readonly end?: ReactNode
  /** Margin notes. */
  readonly aside?: ReactNode
  readonly children: ReactNode
}

export function Entry({ title, note, end, aside, children }: EntryProps) {
  return (
    <section className="entry" {...(title ? { 'aria-label': title } : {})}>
      <div className="min-w-0 border-t border-ink pt-3.5">
        {title ? (
          <div className="mb-3.5 flex flex-wrap items-baseline gap-x-4">
            <h2 className="text-head font-semibold">{title}</h2>
            {note ? <span className="text-ink-faint">{note}</span> : null}
            {end ? <span className="ml-auto">{end}</span> : null}
          </div>
        ) : null}
        {children}
      </div>
      {aside ? <div className="flex min-w-0 flex-col gap-6 phone:mt-4">{aside}</div> : null}
    </section>
  )
}
