/** What the reviewer reads before the table: the change in figures, and the cells that deserve a look first. */
import type { ChangeSummary, LookFirst } from '../../../shared/contract/reviews.ts'
import type { TableKind } from '../../../shared/contract/tables.ts'
import { formatNumber, formatSigned } from '../../lib/format.ts'
import { Facts } from '../../ui/facts.tsx'
import { Entry } from '../../ui/leaf.tsx'
import { Ledger } from '../../ui/ledger.tsx'
import { Note } from '../../ui/note.tsx'

export function ChangeInFigures({ summary }: { summary: ChangeSummary }) {
  const { changed, leaner, richer, largestPct, medianPct, highLoad, highLoadLeaner, thin, byHand, held } = summary
  return (
    <Entry
      title="The change in figures"
      aside={
        highLoadLeaner > 0 ? (
          <Note icon="caution" kind="caution" head={`Leaner at high load in ${highLoadLeaner}`}>
            <p>
              Lean mixture under load melts pistons. They stand first below; sign only if the evidence carries them.
            </p>
          </Note>
        ) : null
      }
    >
      <Facts
        items={[
          { label: 'Cells that change', value: `${changed}: ${richer} richer, ${leaner} leaner` },
          { label: 'Largest step', value: formatSigned(largestPct, 1), unit: '%' },
          { label: 'Middle step', value: formatSigned(medianPct, 1), unit: '%' },
          { label: 'At high load', value: `${highLoad}, of them ${highLoadLeaner} leaner` },
          { label: 'On less than 5 s of evidence', value: String(thin) },
          { label: 'Set or pinned by hand', value: String(byHand) },
          { label: 'Held back by the lean guard', value: String(held) },
        ]}
      />
    </Entry>
  )
}

interface LookFirstSectionProps {
  readonly lookFirst: readonly LookFirst[]
  readonly kind: TableKind
  readonly cellName: (cell: number) => string
  /** Shows the cell in the table below and makes it what a comment speaks of. */
  readonly onSelect: (cell: number) => void
}

export function LookFirstSection({ lookFirst, kind, cellName, onSelect }: LookFirstSectionProps) {
  const digits = kind === 've' ? 1 : 3
  return (
    <Entry title="Look at these first" note="By risk: high load, then size, hand, doubt, steepness">
      <Ledger
        caption="Cells that deserve a look first"
        head={['Cell', 'Why it is here', 'Before', 'After', 'Change', '±, 95 %', 'Evidence']}
        numeric={[2, 3, 4, 5, 6]}
        stack
      >
        {lookFirst.map((entry) => (
          <tr key={entry.cell}>
            <th scope="row">
              <button
                type="button"
                className="min-h-6 cursor-pointer text-left text-copper underline underline-offset-3"
                onClick={() => onSelect(entry.cell)}
              >
                {cellName(entry.cell)}
              </button>
            </th>
            <td className="wide-cell">
              {entry.why}
              {entry.note ? <span className="block text-small text-ink-faint">{entry.note}</span> : null}
            </td>
            <td className="num">{formatNumber(entry.before, digits)}</td>
            <td className="num font-semibold">
              <span className="hidden font-normal phone:inline">to </span>
              {formatNumber(entry.after, digits)}
            </td>
            <td className="num">{formatSigned(entry.changePct, 1)} %</td>
            <td className="num">
              <span className="hidden phone:inline">±</span>
              {entry.sigmaPct === null ? 'none' : formatNumber((2 * entry.sigmaPct * entry.after) / 100, digits)}
            </td>
            <td className="num">{entry.evidenceS === null ? 'none' : `${formatNumber(entry.evidenceS, 1)} s`}</td>
          </tr>
        ))}
      </Ledger>
    </Entry>
  )
}
