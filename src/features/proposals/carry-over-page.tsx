/** A proposal that was overtaken: what the later revision moved, and taking this proposal's cells over to it one by one. */
import { useQuery } from '@tanstack/react-query'
import { useState } from 'react'
import { useNavigate, useParams } from 'react-router-dom'
import type { Moved, MovedCell } from '../../../shared/contract/proposals.ts'
import { formatNumber, formatSigned } from '../../lib/format.ts'
import { paths } from '../../lib/paths.ts'
import { usePageTitle } from '../../lib/page-title.ts'
import { useCan } from '../../lib/session.ts'
import { Banner } from '../../ui/banner.tsx'
import { Button, ButtonLink, TextLink } from '../../ui/button.tsx'
import { Empty } from '../../ui/empty.tsx'
import { TextArea } from '../../ui/field.tsx'
import { Entry, Leaf, PageHead } from '../../ui/leaf.tsx'
import { Ledger } from '../../ui/ledger.tsx'
import { Loading } from '../../ui/loading.tsx'
import { Note } from '../../ui/note.tsx'
import { proposalQueries, useCarryOver } from './queries.ts'

type Take = 'mine' | 'theirs'
type Answers = Readonly<Record<number, Take>>

/** The conclusion the page opens with. */
export function movedSentence({ onto, sameAxes, contested, theirsOnly }: Moved): string {
  if (!onto) return 'Nothing has moved since this proposal was learned'
  if (!sameAxes) return `Revision ${onto.number} has other axes: learn again from it`
  const moved = contested.length + theirsOnly.length
  const cells = (count: number) => `${count} ${count === 1 ? 'cell' : 'cells'}`
  return contested.length === 0
    ? `Revision ${onto.number} has moved ${cells(moved)}, none that you decided`
    : `Revision ${onto.number} has moved ${cells(moved)}; you decided ${contested.length} of them otherwise`
}

export default function CarryOverPage() {
  const { vehicleId = '', proposalId = '' } = useParams()
  const moved = useQuery(proposalQueries.moved(proposalId))
  usePageTitle('What has moved')
  if (moved.isPending) return <Loading what="Comparing with the later revision" />
  if (moved.isError) return <Banner title={moved.error.message}>Go back to the workbench.</Banner>
  const { onto, sameAxes } = moved.data
  return (
    <Leaf>
      <PageHead
        folio={<TextLink to={paths.proposal(vehicleId, proposalId)}>Back to the proposal</TextLink>}
        title={movedSentence(moved.data)}
        lead={
          onto
            ? `This proposal starts from revision ${moved.data.base.number}. Revision ${onto.number} is later, by ${onto.author}, ${onto.state === 'signed' ? 'signed' : 'not signed'}.`
            : `It still stands on revision ${moved.data.base.number}, the newest there is.`
        }
      />
      {onto && sameAxes ? (
        <CarryOver
          key={onto.id}
          moved={moved.data}
          ontoNumber={onto.number}
          ontoId={onto.id}
          {...{ vehicleId, proposalId }}
        />
      ) : (
        <Empty
          title={onto ? 'Cells cannot be matched' : 'There is nothing to carry over'}
          action={
            <ButtonLink to={onto ? paths.workbenchStart(vehicleId) : paths.proposal(vehicleId, proposalId)}>
              {onto ? 'Learn again' : 'Back to the proposal'}
            </ButtonLink>
          }
        >
          {onto ? 'What the logs taught is kept; only the axes changed.' : 'Make the revision as usual.'}
        </Empty>
      )}
    </Leaf>
  )
}

interface CarryOverProps {
  readonly moved: Moved
  readonly ontoId: string
  readonly ontoNumber: number
  readonly vehicleId: string
  readonly proposalId: string
}

function CarryOver({ moved, ontoId, ontoNumber, vehicleId, proposalId }: CarryOverProps) {
  const [answers, setAnswers] = useState<Answers>({})
  const mayDecide = useCan('proposal:edit')
  const { contested, theirsOnly, mineOnly } = moved
  const all = (take: Take) => setAnswers(Object.fromEntries(contested.map(({ cell }) => [cell, take])))
  return (
    <>
      {contested.length > 0 ? (
        <Entry
          title="Decided twice"
          note="one answer for each"
          aside={
            <Note icon="caution" kind="caution" head="Neither is right by being later">
              <p>Look at the evidence of both. At high load take the richer one where you are in doubt.</p>
            </Note>
          }
        >
          {mayDecide ? (
            <div className="mb-4 flex flex-wrap gap-3">
              <Button onClick={() => all('theirs')}>All as in revision {ontoNumber}</Button>
              <Button onClick={() => all('mine')}>All as decided here</Button>
            </div>
          ) : null}
          <ContestedCells
            cells={contested}
            ontoNumber={ontoNumber}
            answers={answers}
            onAnswer={mayDecide ? (cell, take) => setAnswers({ ...answers, [cell]: take }) : null}
          />
        </Entry>
      ) : null}
      <Entry title="Without a question">
        <p>
          {formatNumber(theirsOnly.length)} cells come from revision {ontoNumber}, {formatNumber(mineOnly.length)} from
          this proposal; every other cell is as it was.
        </p>
        <OneSided title={`Moved by revision ${ontoNumber}`} cells={theirsOnly} value={({ theirs }) => theirs} />
        <OneSided title="Decided here" cells={mineOnly} value={({ mine }) => mine} />
      </Entry>
      {mayDecide ? (
        <MakeCarried {...{ moved, ontoId, ontoNumber, vehicleId, proposalId, answers }} />
      ) : (
        <Entry>
          <p className="text-ink-quiet">Carrying over belongs to tuners.</p>
        </Entry>
      )}
    </>
  )
}

const place = ({ rpm, mapKpa }: MovedCell): string => `${rpm} rpm, ${mapKpa} kPa`
const against = (value: number, base: number): string =>
  `${formatNumber(value, 1)} (${formatSigned((value / base - 1) * 100, 1)} %)`

interface ContestedProps {
  readonly cells: readonly MovedCell[]
  readonly ontoNumber: number
  readonly answers: Answers
  readonly onAnswer: ((cell: number, take: Take) => void) | null
}

function ContestedCells({ cells, ontoNumber, answers, onAnswer }: ContestedProps) {
  const choice = (cell: MovedCell, take: Take, words: string) => (
    <label className="flex min-h-6 items-baseline gap-2">
      <input
        type="radio"
        className="size-4 accent-copper"
        name={`cell-${cell.cell}`}
        disabled={onAnswer === null}
        checked={answers[cell.cell] === take}
        aria-label={`${place(cell)}: ${words}, ${formatNumber(cell[take], 1)}`}
        onChange={() => onAnswer?.(cell.cell, take)}
      />
      {against(cell[take], cell.base)}
    </label>
  )
  return (
    <Ledger
      caption="Cells that both changed"
      head={['Cell', 'Before', `Revision ${ontoNumber}`, 'Decided here']}
      numeric={[1]}
      stack
    >
      {cells.map((cell) => (
        <tr key={cell.cell}>
          <th scope="row">{place(cell)}</th>
          <td className="num">{formatNumber(cell.base, 1)}</td>
          <td>{choice(cell, 'theirs', `as in revision ${ontoNumber}`)}</td>
          <td>{choice(cell, 'mine', 'as decided here')}</td>
        </tr>
      ))}
    </Ledger>
  )
}

interface OneSidedProps {
  readonly title: string
  readonly cells: readonly MovedCell[]
  readonly value: (cell: MovedCell) => number
}

const OneSided = ({ title, cells, value }: OneSidedProps) =>
  cells.length === 0 ? null : (
    <details className="mt-3">
      <summary className="min-h-6 cursor-pointer text-copper">
        {title}: {cells.length}
      </summary>
      <ul className="mt-2 grid grid-cols-1 gap-x-8 sm:grid-cols-2">
        {cells.map((cell) => (
          <li key={cell.cell} className="flex justify-between gap-4 border-b border-rule py-1">
            <span>{place(cell)}</span>
            <span>
              {formatNumber(cell.base, 1)} to {against(value(cell), cell.base)}
            </span>
          </li>
        ))}
      </ul>
    </details>
  )

function MakeCarried({
  moved,
  ontoId,
  ontoNumber,
  vehicleId,
  proposalId,
  answers,
}: CarryOverProps & { readonly answers: Answers }) {
  const navigate = useNavigate()
  const [note, setNote] = useState('')
  const carry = useCarryOver(proposalId)
  const left = moved.contested.filter(({ cell }) => answers[cell] === undefined).length
  const submit = () =>
    carry.mutate(
      {
        version: moved.version,
        ontoId,
        note,
        answers: moved.contested.flatMap(({ cell }) => (answers[cell] ? [{ cell, take: answers[cell] }] : [])),
      },
      { onSuccess: (revision) => void navigate(paths.revision(vehicleId, revision.id)) },
    )
  return (
    <Entry title="Make the draft">
      <form
        className="max-w-(--measure)"
        onSubmit={(event) => {
          event.preventDefault()
          submit()
        }}
      >
        <TextArea
          label="Note to the reviewer"
          rows={2}
          maxLength={500}
          value={note}
          onChange={(event) => setNote(event.target.value)}
        />
        {carry.isError ? (
          <Banner title={carry.error.message}>Your answers are kept where they still apply.</Banner>
        ) : null}
        <Button className="mt-3" variant="solid" type="submit" disabled={left > 0 || carry.isPending}>
          Make a revision on {ontoNumber}
        </Button>
        {left > 0 ? (
          <p className="mt-2 text-ink-quiet">
            {left} {left === 1 ? 'cell still needs' : 'cells still need'} an answer.
          </p>
        ) : null}
      </form>
    </Entry>
  )
}
