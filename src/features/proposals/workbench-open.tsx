/** The open proposal: grid, logs, the card of the selected cell, and the running count. */
import { Redo2, Undo2 } from 'lucide-react'
import { lazy, Suspense, useCallback, useDeferredValue, useState, type KeyboardEvent } from 'react'
import type { Proposal } from '../../../shared/contract/proposals.ts'
import { formatNumber } from '../../lib/format.ts'
import { paths } from '../../lib/paths.ts'
import { useRemembered } from '../../lib/remember.ts'
import { useCan } from '../../lib/session.ts'
import { Banner } from '../../ui/banner.tsx'
import { Button, ButtonLink, TextLink } from '../../ui/button.tsx'
import { cellsOf, type Selection } from '../../ui/heatmap/heatmap.tsx'
import { Note } from '../../ui/note.tsx'
import { CellCard } from './cell-card.tsx'
import { DecideByRule } from './decide-by-rule.tsx'
import { cellState, decideAll, tally, type Decided, type Surface } from './decisions.ts'
import { FuelTable } from './fuel-table.tsx'
import { NearCells } from './near-cells.tsx'
import { LogsRail } from './logs-rail.tsx'
import { MakeRevision } from './make-revision.tsx'
import { Summary } from './summary.tsx'
import { TallyRow } from './tally-row.tsx'
import { useDecisions, type Decisions } from './use-decisions.ts'
import { views } from './views.ts'

/** Charts are fetched when the table already stands. */
const Profile = lazy(() => import('./profile.tsx'))
const ReplayPanel = lazy(() => import('./replay-panel.tsx'))

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
  const [view, setView] = useRemembered('workbench-view', ['proposed', ...views.filter((each) => each !== 'proposed')])
  const [second, setSecond] = useRemembered('workbench-second', ['none', ...views] as const)
  const [selection, setSelection] = useState<Selection | null>(() => {
    const cell = firstOpen(decided)
    return { anchor: cell, focus: cell }
  })
  const [replay, setReplay] = useRemembered('workbench-replay', ['closed', 'open'] as const)
  const [panel, setPanel] = useState<'rule' | 'revision' | null>(null)
  const [preview, setPreview] = useState<ReadonlySet<number>>(new Set())
  const [handOpen, setHandOpen] = useState(false)
  const cells = selection ? cellsOf(grid, selection) : []
  // What lies below the table is drawn after the table has answered the key.
  const later = useDeferredValue(decided)
  const laterCell = useDeferredValue(selection?.focus ?? null)

  const onPreview = useCallback((list: readonly number[]) => setPreview(new Set(list)), [])
  const closePanel = () => {
    setPanel(null)
    setPreview(new Set())
  }

  const onKey = (event: KeyboardEvent) => {
    const chosen = event.altKey ? views[Number(event.code.replace('Digit', '')) - 1] : undefined
    if (chosen) {
      event.preventDefault()
      setView(chosen)
    }
    if (!mayDecide || cells.length === 0 || event.altKey || event.ctrlKey || event.metaKey) return
    const key = event.key.toLowerCase()
    const decision = ({ a: 'accepted', k: 'kept', p: 'pinned' } as const)[key]
    if (decision) decisions.decide(decideAll(decided, cells, decision))
    if (key === 'h' && cells.some((cell) => decided.decisions[cell] !== 'pinned')) {
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
              {decisions.offline ? 'Kept on this device' : decisions.pending ? 'Saving…' : 'Saved'}
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
            <Button onClick={() => setPanel(panel === 'rule' ? null : 'rule')}>Decide by rule</Button>
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
      <DecisionTrouble decisions={decisions} />
      <div className="mt-6 grid gap-x-8 gap-y-6 laptop:grid-cols-[minmax(0,1fr)_var(--leaf-margin)] laptop:grid-rows-[auto_auto_1fr] desk:grid-rows-[auto_1fr] desk:grid-cols-[var(--leaf-rail)_minmax(0,1fr)_var(--leaf-margin)]">
        <div className="order-3 laptop:order-none laptop:col-start-1 desk:row-span-2 desk:row-start-1 desk:border-r desk:border-rule desk:pr-6">
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
        <section aria-label="Fuel table" className="min-w-0 laptop:col-start-1 desk:col-start-2 desk:row-start-1">
          {panel === 'rule' ? (
            <DecideByRule
              decided={decided}
              selected={cells}
              onPreview={onPreview}
              onDecide={(action, list) => {
                decisions.decide(decideAll(decided, list, action))
                closePanel()
              }}
              onClose={closePanel}
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
          <FuelTable
            decided={decided}
            mayDecide={mayDecide}
            view={view}
            onView={setView}
            second={second}
            onSecond={setSecond}
            selection={selection}
            onSelect={(next) => {
              setSelection(next)
              setHandOpen(false)
            }}
            preview={preview}
            onKey={onKey}
            onDecide={decisions.decide}
            onUndo={decisions.undo}
            onRedo={decisions.redo}
          />
          {selection ? (
            <NearCells
              decided={decided}
              view={view}
              cell={selection.focus}
              onSelect={(cell) => setSelection({ anchor: cell, focus: cell })}
            />
          ) : null}
        </section>
        <div className="order-2 min-w-0 laptop:order-none laptop:col-start-1 desk:col-start-2 desk:row-start-2">
          <TallyRow decided={later} revisionNumber={proposal.base.number + 1} />
          <Summary decided={later} vehicleId={vehicleId} />
          {laterCell !== null ? (
            <Suspense fallback={<div className="h-[17.5rem]" />}>
              <Profile decided={later} cell={laterCell} />
            </Suspense>
          ) : null}
          <section aria-label="Replay" className="mt-7 border-t border-ink pt-3.5">
            <div className="mb-3 flex flex-wrap items-baseline gap-x-4">
              <h2 className="font-semibold">Replay a drive</h2>
              <Button
                variant="word"
                aria-expanded={replay === 'open'}
                onClick={() => setReplay(replay === 'open' ? 'closed' : 'open')}
              >
                {replay === 'open' ? 'Put it away' : 'Show what it would have read'}
              </Button>
            </div>
            {replay === 'open' ? (
              <Suspense fallback={null}>
                <ReplayPanel proposal={proposal} />
              </Suspense>
            ) : null}
          </section>
        </div>
        <div className="order-1 laptop:order-none laptop:col-start-2 laptop:row-span-3 laptop:row-start-1 desk:col-start-3 desk:row-span-2">
          {selection ? (
            <CellCard
              proposal={proposal}
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
              <Note
                icon="caution"
                kind="caution"
                head={`${proposal.surface.held.length} ${proposal.surface.held.length === 1 ? 'cell' : 'cells'} held at high load`}
              >
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

/** What went wrong with storing decisions, and what can be done about it. */
function DecisionTrouble({ decisions }: { decisions: Decisions }) {
  const { offline, problem, refused, sendRefused, dropRefused } = decisions
  if (offline) {
    return (
      <Banner title="No connection">
        What you decided is kept on this device and sent when the connection returns. Do not sign until then.
      </Banner>
    )
  }
  if (refused.length > 0) {
    return (
      <Banner title={problem?.message ?? 'Somebody decided cells of this proposal meanwhile.'}>
        <p>
          The page shows what is stored. {formatNumber(refused.length)}{' '}
          {refused.length === 1 ? 'decision of yours is' : 'decisions of yours are'} kept here and not stored.
        </p>
        <div className="mt-2 flex gap-3">
          <Button onClick={sendRefused}>Decide them again, on top</Button>
          <Button onClick={dropRefused}>Drop them</Button>
        </div>
      </Banner>
    )
  }
  return problem ? <Banner title={problem.message}>The page shows what is stored.</Banner> : null
}
