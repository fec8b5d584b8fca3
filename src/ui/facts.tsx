/** Names and values on hairlines, and the large figures that are the point of a page. */
import { Fragment, type ReactNode } from 'react'

export interface Fact {
  readonly label: string
  readonly value: ReactNode
  readonly unit?: string
}

export const Facts = ({ items }: { items: readonly Fact[] }) => (
  <dl className="mt-3.5 grid grid-cols-[minmax(0,max-content)_1fr]">
    {items.map(({ label, value, unit }) => (
      <Fragment key={label}>
        <dt className="border-b border-rule py-1.5 pr-6 text-ink-quiet">{label}</dt>
        <dd className="border-b border-rule py-1.5 text-right font-semibold">
          {value} {unit ? <span className="font-normal text-ink-faint">{unit}</span> : null}
        </dd>
      </Fragment>
    ))}
  </dl>
)

export const Figures = ({ items }: { items: readonly Fact[] }) => (
  <dl className="mt-6 flex flex-wrap gap-x-12 gap-y-5">
    {items.map(({ label, value, unit }) => (
      <div key={label} className="flex flex-col-reverse">
        <dt className="text-ink-quiet">{label}</dt>
        <dd className="text-figure whitespace-nowrap">
          {value}
          {unit ? <span className="text-head">&thinsp;{unit}</span> : null}
        </dd>
      </div>
    ))}
  </dl>
)
