/** The open proposal: grid, logs, the card of the selected cell, and the running count. */
import { Redo2, Undo2 } from 'lucide-react'
import { useState, type KeyboardEvent } from 'react'
import type { Proposal } from '../../../shared/contract/proposals.ts'
import { formatNumber, formatSigned } from '../../lib/format.ts'
import { paths } from '../../lib/paths.ts'
import { useCan } from '../../lib/session.ts'
import { Banner } from '../../ui/banner.tsx'
import { Button, ButtonLink, TextLink } from '../../ui/button.tsx'
import { cellsOf, Heatmap, type HeatmapMark, type Selection } from '../../ui/heatmap/heatmap.tsx'
import { Legend } from '../../ui/heatmap/legend.tsx'
import { Note } from '../../ui/note.tsx'
import { AcceptByRule } from './accept-by-rule.tsx'
import { CellCard } from './cell-card.tsx'
import { cellState, hasEvidence, tally, type Decided, type Surface } from './decisions.ts'
import { NearCells } from './near-cells.tsx'
import { LogsRail } from './logs-rail.tsx'
import { MakeRevision } from './make-revision.tsx'
import { TallyRow } from './tally-row.tsx'
import { useDecisions } from './use-decisions.ts'
import { ViewChoice } from './view-choice.tsx'
import { viewName, views, viewScale, viewUnit, viewValue, type View } from './views.ts'

interface WorkbenchOpenProps {
  readonly proposal: Proposal & { surface: Surface }
  readonly vehicleId: string
}

/** The conclusion the page opens with. */
export function workbenchSentence(decided: Decided): string {
  const { open, held, changed } = tally(decided)
  if (open > 0) return `${formatNumber(open)} ${open === 1 ? 'cell' : 'cells'} left to decide`
  if (held > 0) return `Everything is decided; ${formatNumber(held)} ${held === 1 ? 'cell is' : 'cells are'} held`
  return changed > 0 ? 'Everything is decided' : 'Nothing changes'
}

const markOf = (decided: Decided, cell: number): HeatmapMark | null => {
  const state = cellState(decided, cell)
  return state === 'accepted' || state === 'none' ? null : state
}

/** Faults that look like a wrong table, by what they look like. */
const diagnosisHead: Readonly<Record<string, string>> = {
  scale: 'One factor over the whole table',
  'dead-time': 'Looks like injector dead time',
  'exhaust-leak': 'Looks like an exhaust leak',
  'injector-flow': 'Injector flow does not add up',
  'injector-dead-time': 'Dead time does not add up',
}

/** Before the first selection the card speaks of the first open cell. */
const firstOpen = (decided: Decided): number =>
  Math.max(
    0,
    decided.decisions.findIndex((_, cell) => cellState(decided, cell) === 'open'),
  )

export function WorkbenchOpen({ proposal, vehicleId }: WorkbenchOpenProps) {
  const mayEdit = useCan('proposal:edit')
  const mayDecide = mayEdit && proposal.state === 'open'
  const decisions = useDecisions(proposal)
  const { decided } = decisions
  const { grid } = proposal.surface
  const [view, setView] = useState<View>('proposed')
  const [selection, setSelection] = useState<Selection | null>(() => {
    const cell = firstOpen(decided)
    return { anchor: cell, focus: cell }
  })
  const [panel, setPanel] = useState<'rule' | 'revision' | null>(null)
  const [preview, setPreview] = useState<ReadonlySet<number>>(new Set())
  const [handOpen, setHandOpen] = useState(false)
  const cells = selection ? cellsOf(grid, selection) : []

  const onKey = (event: KeyboardEvent) => {
    const key = event.key.toLowerCase()
    if (event.ctrlKey || event.metaKey) {
      if (key === 'z' && mayDecide) {
        event.preventDefault()
        if (event.shiftKey) decisions.redo()
        else decisions.undo()
      } else if (key === 'y' && mayDecide) decisions.redo()
      return
    }
    const chosen = views[Number(key) - 1]
    if (chosen) setView(chosen)
    if (!mayDecide || cells.length === 0) return
    if (key === 'a')
      decisions.decide(
        cells.filter((cell) => hasEvidence(proposal.surface, cell)).map((cell) => ({ cell, decision: 'accepted' })),
      )
    if (key === 'k') decisions.decide(cells.map((cell) => ({ cell, decision: 'kept' })))
    if (key === 'p') decisions.decide(cells.map((cell) => ({ cell, decision: 'pinned' })))
    if (key === 'h') {
      event.preventDefault()
      setHandOpen(true)
    }
  }

  return (
    <main className="px-(--leaf-gutter) pt-6 pb-16">
      <header className="flex flex-wrap items-end gap-x-8 gap-y-4">
        <div>
          <p className="text-ink-faint">
            Proposal {proposal.number} from revision {proposal.base.number}
          </p>
          <h1 className="mt-1 text-title font-semibold">{workbenchSentence(decided)}</h1>
        </div>
        {mayDecide ? (
          <div className="ml-auto flex flex-wrap items-center gap-3 phone:ml-0">
            <span role="status" className="text-small text-ink-faint">
              {decisions.pending ? 'Saving…' : 'Saved'}
            </span>
            <Button
              aria-label="Undo"
              disabled={!decisions.canUndo}
              onClick={decisions.undo}
              icon={<Undo2 size={16} strokeWidth={1.75} aria-hidden />}
            />
            <Button
              aria-label="Redo"
              disabled={!decisions.canRedo}
              onClick={decisions.redo}
              icon={<Redo2 size={16} strokeWidth={1.75} aria-hidden />}
            />
            <Button onClick={() => setPanel(panel === 'rule' ? null : 'rule')}>Accept by rule</Button>
            <Button onClick={() => setPanel(panel === 'revision' ? null : 'revision')}>Make a revision</Button>
          </div>
        ) : null}
      </header>
      {proposal.overtakenBy ? (
        <Banner title={`Revision ${proposal.overtakenBy.number} has been made since`}>
          This proposal started from revision {proposal.base.number}. What you make here does not contain the later
          changes.{' '}
          <TextLink to={paths.carryOver(vehicleId, proposal.id)}>See what has moved and carry it over</TextLink>
        </Banner>
      ) : null}
      {decisions.problem ? <Banner title={decisions.problem.message}>The page shows what is stored.</Banner> : null}
      <div className="mt-6 grid gap-x-8 gap-y-6 laptop:grid-cols-[minmax(0,1fr)_var(--leaf-margin)] desk:grid-cols-[var(--leaf-rail)_minmax(0,1fr)_var(--leaf-margin)]">
        <div className="order-3 laptop:order-none laptop:col-start-1 desk:border-r desk:border-rule desk:pr-6">
          <LogsRail proposal={proposal} vehicleId={vehicleId} maySwitch={mayDecide && !decisions.pending} />
          {proposal.surface.diagnoses.map((diagnosis) => (
            <div key={diagnosis.kind} className="mt-5">
              <Note icon="caution" kind="caution" head={diagnosisHead[diagnosis.kind] ?? 'Something besides the table'}>
                <p>{diagnosis.detail}</p>
                <p>{diagnosis.lookAt}</p>
              </Note>
            </div>
          ))}
          <p className="mt-4">
            <ButtonLink variant="word" to={paths.workbenchStart(vehicleId)}>
              Learn from other logs
            </ButtonLink>
          </p>
        </div>
        <section aria-label="Fuel table" className="min-w-0 laptop:col-start-1 desk:col-start-2">
          {panel === 'rule' ? (
            <AcceptByRule
              decided={decided}
              onPreview={(list) => setPreview(new Set(list))}
              onAccept={(list) => {
                decisions.decide(list.map((cell) => ({ cell, decision: 'accepted' })))
                setPanel(null)
                setPreview(new Set())
              }}
              onClose={() => {
                setPanel(null)
                setPreview(new Set())
              }}
            />
          ) : null}
          {panel === 'revision' ? (
            <MakeRevision
              vehicleId={vehicleId}
              proposalId={proposal.id}
              version={proposal.version}
              decided={decided}
              onClose={() => setPanel(null)}
            />
          ) : null}
          <ViewChoice view={view} onChange={setView} />
          <Heatmap
            label={`${viewName[view]}, ${viewUnit[view]}`}
            grid={grid}
            values={proposal.surface.current.map((_, cell) => viewValue(decided, view, cell))}
            view={viewScale[view]}
            format={(value) =>
              viewScale[view] === 'change' || viewScale[view] === 'misfit'
                ? formatSigned(value, 1)
                : formatNumber(value, 1)
            }
            none={(cell) => !hasEvidence(proposal.surface, cell) && cellState(decided, cell) === 'none'}
            mark={(cell) => markOf(decided, cell)}
            evidenceS={proposal.surface.evidenceS}
            selection={selection}
            onSelect={(next) => {
              setSelection(next)
              setHandOpen(false)
            }}
            preview={preview}
            onKey={onKey}
            cellLabel={(cell) => labelOf(proposal.surface, decided, view, cell)}
          />
          {selection ? (
            <NearCells
              decided={decided}
              view={view}
              cell={selection.focus}
              onSelect={(cell) => setSelection({ anchor: cell, focus: cell })}
            />
          ) : null}
          <Legend view={viewScale[view]} unit={viewUnit[view]} marks />
          <TallyRow decided={decided} revisionNumber={proposal.base.number + 1} />
        </section>
        <div className="laptop:col-start-2 laptop:row-span-2 laptop:row-start-1 desk:col-start-3">
          {selection ? (
            <CellCard
              decided={decided}
              cell={selection.focus}
              cells={cells}
              mayDecide={mayDecide}
              handInput={{ open: handOpen, set: setHandOpen }}
              onDecide={decisions.decide}
            />
          ) : (
            <p className="text-ink-quiet">Select a cell to see what speaks for it.</p>
          )}
          {proposal.surface.held.length > 0 ? (
            <div className="mt-7">
              <Note icon="caution" kind="caution" head={`${proposal.surface.held.length} cells held at high load`}>
                <p>
                  Less fuel at high load is taken only as far as the evidence carries it. More seconds in those cells
                  would release them.
                </p>
              </Note>
            </div>
          ) : null}
          <div className="mt-6">
            <Note icon="caution" kind="caution" head="Not while driving">
              <p>
                Read and decide with the vehicle parked, or let a passenger hold the screen. Lean mixture under load
                melts pistons: stop at any doubt.
              </p>
            </Note>
          </div>
        </div>
      </div>
    </main>
  )
}

function labelOf(surface: Surface, decided: Decided, view: View, cell: number): string {
  const cols = surface.grid.rpm.length
  const value = viewValue(decided, view, cell)
  const state = cellState(decided, cell)
  const words =
    state === 'none'
      ? 'no evidence'
      : `${formatNumber(surface.evidenceS[cell] ?? 0, 1)} seconds of evidence, ${state.replace('-', ' ')}`
  return `${surface.grid.rpm[cell % cols]} rpm, ${surface.grid.mapKpa[Math.floor(cell / cols)]} kPa: ${value === null ? 'none' : formatNumber(value, 1)}, ${words}`
}
