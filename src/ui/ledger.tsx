/** A table of entries: small head row, hairlines, numbers to the right; on a phone each row becomes a block. */
import type { ReactNode } from 'react'

interface LedgerProps {
  readonly caption: string
  readonly head: readonly string[]
  /** Indices of columns that hold numbers. */
  readonly numeric?: readonly number[]
  readonly stack?: boolean
  readonly children: ReactNode
}

export function Ledger({ caption, head, numeric = [], stack = false, children }: LedgerProps) {
  return (
    <table className={`ledger ${stack ? 'stack' : ''}`}>
      <caption className="sr-only">{caption}</caption>
      <thead>
        <tr>
          {head.map((words, i) => (
            <th key={words} scope="col" className={numeric.includes(i) ? 'num' : ''}>
              {words}
            </th>
          ))}
        </tr>
      </thead>
      <tbody>{children}</tbody>
    </table>
  )
}
