/** The check after typing or loading: drop in the table read back from the controller, and see which revision it is. */
import { useMutation } from '@tanstack/react-query'
import { useState, type DragEvent } from 'react'
import { useParams } from 'react-router-dom'
import { checkReadBack, type ReadBack } from '../../../shared/contract/exports.ts'
import { call } from '../../lib/api.ts'
import { formatNumber, formatSigned } from '../../lib/format.ts'
import { usePageTitle } from '../../lib/page-title.ts'
import { paths } from '../../lib/paths.ts'
import { Banner } from '../../ui/banner.tsx'
import { Button, TextLink } from '../../ui/button.tsx'
import { Select, TextArea } from '../../ui/field.tsx'
import { Entry, Leaf, PageHead } from '../../ui/leaf.tsx'
import { Ledger } from '../../ui/ledger.tsx'
import { Note } from '../../ui/note.tsx'

type Kind = 've' | 'target'

/** The conclusion, once there is one. */
export function readBackSentence(result: ReadBack | undefined): string {
  if (!result) return 'Is what the controller holds what was signed?'
  if (result.matches) {
    const signed = result.matches.state === 'signed' ? '' : ', which nobody has signed'
    return `It is revision ${result.matches.number}, cell for cell${signed}`
  }
  if (result.closest) {
    const count = result.closest.differ.length
    return `${formatNumber(count)} ${count === 1 ? 'cell differs' : 'cells differ'} from revision ${result.closest.number}`
  }
  return result.axes.length > 0 ? 'The axes are not those of any revision' : 'It matches no revision of this vehicle'
}

export default function ReadBackPage() {
  const { vehicleId = '' } = useParams()
  const [text, setText] = useState('')
  const [kind, setKind] = useState<Kind>('ve')
  const check = useMutation({
    mutationFn: () => call(checkReadBack, { params: { vehicleId }, body: { text, kind } }),
  })
  usePageTitle('Check a read-back')
  const result = check.data
  return (
    <Leaf>
      <PageHead
        folio="Check a read-back"
        title={readBackSentence(result)}
        lead={result?.detail ?? 'Drop in the table read back from the controller: a file, or cells from a spreadsheet.'}
      />
      {result ? <Answer result={result} vehicleId={vehicleId} kind={kind} /> : null}
      <Entry
        title="The table"
        aside={
          <Note icon="info" head="Nothing is stored">
            <p>
              The table is only compared. Axes in the first row and column, as the export writes them; either way round,
              with either decimal mark.
            </p>
          </Note>
        }
      >
        <form
          onSubmit={(event) => {
            event.preventDefault()
            check.mutate()
          }}
        >
          <div className="mb-4 max-w-60">
            <Select
              label="Which table"
              value={kind}
              onChange={(event) => {
                check.reset()
                setKind(event.target.value as Kind)
              }}
            >
              <option value="ve">fuel table, VE in %</option>
              <option value="target">target table, lambda or AFR</option>
            </Select>
          </div>
          <DropTable text={text} onText={setText} />
          {check.isError ? <Banner title={check.error.message}>What you gave is kept.</Banner> : null}
          <Button className="mt-4" variant="solid" type="submit" disabled={text.trim() === '' || check.isPending}>
            Compare
          </Button>
        </form>
      </Entry>
    </Leaf>
  )
}

/** A place to drop a file on, with a field to paste into and a button to choose a file for those who do neither. */
function DropTable({ text, onText }: { text: string; onText: (text: string) => void }) {
  const [over, setOver] = useState(false)
  const read = (file: File | undefined) => {
    if (file) void file.text().then(onText)
  }
  const onDrop = (event: DragEvent) => {
    event.preventDefault()
    setOver(false)
    read(event.dataTransfer.files[0])
  }
  return (
    <div
      className={over ? 'outline-2 outline-offset-4 outline-ink outline-dashed' : ''}
      onDragOver={(event) => {
        event.preventDefault()
        setOver(true)
      }}
      onDragLeave={() => setOver(false)}
      onDrop={onDrop}
    >
      <TextArea
        label="Cells"
        rows={8}
        value={text}
        onChange={(event) => onText(event.target.value)}
        hint="Paste from a spreadsheet, or drop a CSV file here"
      />
      <label className="mt-3 block">
        <span className="font-semibold">Or a file</span>
        <input
          type="file"
          accept=".csv,.txt,.json,text/csv,text/plain,application/json"
          className="mt-1 block"
          onChange={(event) => read(event.target.files?.[0])}
        />
      </label>
    </div>
  )
}

interface AnswerProps {
  readonly result: ReadBack
  readonly vehicleId: string
  readonly kind: Kind
}

/** Half of the last place that was read, in words a person can weigh. */
const withinWords = (within: number, kind: Kind): string =>
  within < 1e-6 ? '' : `Compared to within ${Number(within.toPrecision(1))}${kind === 've' ? ' %' : ' lambda'}.`

function Answer({ result, vehicleId, kind }: AnswerProps) {
  const { matches, alsoMatches, closest, axes, within } = result
  const found = matches ?? closest
  return (
    <Entry
      title={matches ? 'What it is' : 'What differs'}
      note={withinWords(within, kind)}
      aside={
        matches?.state !== 'signed' ? (
          <Note icon="caution" kind="caution" head="Do not drive on it unseen">
            <p>What is in the controller is not what somebody signed. Lean mixture under load melts pistons.</p>
          </Note>
        ) : null
      }
    >
      {matches ? (
        <p>
          {matches.inEngine
            ? 'It is also what was recorded as in the engine.'
            : 'Another revision, or none, was recorded as in the engine: record this one on its page.'}
          {alsoMatches.length > 0
            ? ` At these places it cannot be told from ${alsoMatches.map((each) => `revision ${each.number}`).join(', ')}.`
            : ''}
        </p>
      ) : null}
      {closest ? <Differences differ={closest.differ} kind={kind} number={closest.number} /> : null}
      {axes.length > 0 ? (
        <ul>
          {axes.map(({ axis, expected, found: there }) => (
            <li key={`${axis}${expected}`}>
              {axis} breakpoint: {expected} expected, <b>{there}</b> found
            </li>
          ))}
        </ul>
      ) : null}
      {found ? (
        <p className="mt-3">
          <TextLink to={paths.revision(vehicleId, found.id)}>Open revision {found.number}</TextLink>
        </p>
      ) : null}
    </Entry>
  )
}

/** More rows than anybody compares by eye; the count above tells how many there are. */
const mostRows = 200

function Differences({
  differ,
  kind,
  number,
}: {
  differ: NonNullable<ReadBack['closest']>['differ']
  kind: Kind
  number: number
}) {
  const digits = kind === 've' ? 2 : 3
  return (
    <>
      <Ledger
        caption={`Cells that differ from revision ${number}`}
        head={['rpm', 'kPa', `Revision ${number}`, 'Read back', 'Difference']}
        numeric={[0, 1, 2, 3, 4]}
      >
        {differ.slice(0, mostRows).map((cell) => (
          <tr key={cell.cell}>
            <td className="num">{cell.rpm}</td>
            <td className="num">{cell.mapKpa}</td>
            <td className="num">{formatNumber(cell.expected, digits)}</td>
            <td className="num font-semibold">{formatNumber(cell.found, digits)}</td>
            <td className="num">{formatSigned((cell.found / cell.expected - 1) * 100, 1)} %</td>
          </tr>
        ))}
      </Ledger>
      {differ.length > mostRows ? <p className="mt-2">And {differ.length - mostRows} more.</p> : null}
    </>
  )
}
