/** The bench: what wants attention, most urgent first, and the vehicles. */
import { useQueries, useQuery } from '@tanstack/react-query'
import { useState } from 'react'
import type { LogLine } from '../../../shared/contract/logs.ts'
import type { ProposalLine } from '../../../shared/contract/proposals.ts'
import type { RevisionLine } from '../../../shared/contract/tables.ts'
import type { Vehicle } from '../../../shared/contract/vehicles.ts'
import { formatNumber } from '../../lib/format.ts'
import { usePageTitle } from '../../lib/page-title.ts'
import { paths } from '../../lib/paths.ts'
import { useCan, useMe } from '../../lib/session.ts'
import { Banner } from '../../ui/banner.tsx'
import { ButtonLink, TextLink } from '../../ui/button.tsx'
import { Empty } from '../../ui/empty.tsx'
import { Entry, Leaf, PageHead } from '../../ui/leaf.tsx'
import { Loading } from '../../ui/loading.tsx'
import { Note } from '../../ui/note.tsx'
import { Status, type StatusWord } from '../../ui/status.tsx'
import { logQueries } from '../logs/queries.ts'
import { proposalQueries } from '../proposals/queries.ts'
import { tableQueries } from '../tables/queries.ts'
import { vehicleQueries } from '../vehicles/queries.ts'
import { VehicleRow } from '../vehicles/vehicle-row.tsx'

export interface Attention {
  readonly state: StatusWord
  readonly title: string
  readonly detail: string
  readonly to: string
  readonly link: string
  readonly rank: number
}

interface Gathered {
  readonly vehicle: Vehicle
  readonly logs: readonly LogLine[]
  readonly proposals: readonly ProposalLine[]
  readonly revisions: readonly RevisionLine[]
}

/** What wants attention, the most urgent first. Pure. */
export function attentionOf(all: readonly Gathered[], may: { sign: boolean; edit: boolean }): Attention[] {
  const list = all.flatMap(({ vehicle, logs, proposals, revisions }) => [
    ...logs
      .filter((log) => log.worstHealth === 'dead')
      .map((log): Attention => ({
        state: 'Dead',
        title: 'A sensor sends nothing',
        detail: `${vehicle.name}, Log ${log.number}: ${log.title}`,
        to: paths.log(vehicle.id, log.id),
        link: `Log ${log.number}`,
        rank: 0,
      })),
    ...logs
      .filter((log) => log.state === 'failed' || log.state === 'rejected' || log.state === 'needs-mapping')
      .map((log): Attention => ({
        state: log.state === 'needs-mapping' ? 'Needs an answer' : 'Failed',
        title: log.trouble ?? 'A log could not be read',
        detail: `${vehicle.name}, Log ${log.number}`,
        to: paths.log(vehicle.id, log.id),
        link: `Log ${log.number}`,
        rank: 1,
      })),
    ...revisions
      .filter((revision) => revision.state === 'submitted')
      .map((revision): Attention => ({
        state: 'Submitted',
        title: `Revision ${revision.number} waits for a signature`,
        detail: `${vehicle.name}, prepared by ${revision.author.name}`,
        to: paths.revision(vehicle.id, revision.id),
        link: `Revision ${revision.number}`,
        rank: may.sign ? 2 : 5,
      })),
    ...revisions
      .filter((revision) => revision.state === 'sent-back')
      .map((revision): Attention => ({
        state: 'Sent back',
        title: `Revision ${revision.number} was sent back`,
        detail: vehicle.name,
        to: paths.revision(vehicle.id, revision.id),
        link: `Revision ${revision.number}`,
        rank: may.edit ? 2 : 5,
      })),
    ...proposals
      .filter((proposal) => proposal.state === 'open' && (proposal.counts?.open ?? 0) > 0)
      .map((proposal): Attention => ({
        state: 'Open',
        title: `${formatNumber(proposal.counts?.open ?? 0)} cells left to decide`,
        detail: `${vehicle.name}, learned from ${proposal.logs.length} ${proposal.logs.length === 1 ? 'log' : 'logs'}`,
        to: paths.proposal(vehicle.id, proposal.id),
        link: 'Workbench',
        rank: 3,
      })),
  ])
  return list.sort((a, b) => a.rank - b.rank)
}

export default function BenchPage() {
  usePageTitle('Bench')
  const me = useMe()
  const [today] = useState(() =>
    new Intl.DateTimeFormat('en-GB', { weekday: 'long', day: 'numeric', month: 'long' }).format(new Date()),
  )
  const mayEdit = useCan('vehicle:edit')
  const maySign = useCan('revision:sign-off')
  const seesProposals = useCan('proposal:read')
  const seesLogs = useCan('log:read')
  const vehicles = useQuery(vehicleQueries.list())
  const shown = (vehicles.data?.vehicles ?? []).filter((vehicle) => !vehicle.archived)
  const logs = useQueries({ queries: shown.map((vehicle) => ({ ...logQueries.list(vehicle.id), enabled: seesLogs })) })
  const proposals = useQueries({
    queries: shown.map((vehicle) => ({ ...proposalQueries.list(vehicle.id), enabled: seesProposals })),
  })
  const revisions = useQueries({
    queries: shown.map((vehicle) => ({ ...tableQueries.list(vehicle.id), enabled: seesLogs })),
  })
  if (vehicles.isPending) return <Loading what="Opening the book" />
  if (vehicles.isError) {
    return (
      <Leaf>
        <Banner title={vehicles.error.message}>Load the page again.</Banner>
      </Leaf>
    )
  }
  if (shown.length === 0) return <EmptyBench mayEdit={mayEdit} />
  const gathered = shown.map((vehicle, i) => ({
    vehicle,
    logs: logs[i]?.data?.logs ?? [],
    proposals: proposals[i]?.data?.proposals ?? [],
    revisions: revisions[i]?.data?.revisions ?? [],
  }))
  const attention = attentionOf(gathered, { sign: maySign, edit: mayEdit })
  const first = attention.find(({ rank }) => rank === 2 || rank === 3) ?? attention[0]
  return (
    <Leaf>
      <PageHead
        folio={today}
        title={first ? first.title : 'Nothing waits on the bench'}
        lead={first ? `${first.detail}.` : `${me.workshop.name} is up to date.`}
        actions={
          first ? (
            <ButtonLink variant="solid" to={first.to}>
              Open {first.link === 'Workbench' ? 'the workbench' : first.link.toLowerCase()}
            </ButtonLink>
          ) : null
        }
      />
      {attention.length > 0 ? (
        <Entry title="Needs attention" note={`${attention.length} ${attention.length === 1 ? 'entry' : 'entries'}`}>
          <ul>
            {attention.map((entry) => (
              <li
                key={`${entry.to}${entry.title}`}
                className="grid grid-cols-[8.5rem_1fr_auto] gap-x-4 border-b border-rule py-3.5 phone:grid-cols-[1fr_auto]"
              >
                <span className="phone:col-span-2">
                  <Status state={entry.state} />
                </span>
                <span>
                  <b className="block font-semibold">{entry.title}</b>
                  {entry.detail}
                </span>
                <TextLink to={entry.to}>{entry.link}</TextLink>
              </li>
            ))}
          </ul>
        </Entry>
      ) : null}
      <Entry
        title="Vehicles"
        end={mayEdit ? <TextLink to={paths.newVehicle()}>Add a vehicle</TextLink> : null}
        aside={
          <Note icon="info" head="Reading the patch">
            <p>
              Each square is a cell of the fuel table. The darker, the more seconds of evidence; hatched, none yet. Load
              rises upward, speed to the right.
            </p>
          </Note>
        }
      >
        {gathered.map((each) => (
          <VehicleRow
            key={each.vehicle.id}
            vehicle={each.vehicle}
            proposals={each.proposals}
            revisions={each.revisions}
            logs={each.logs}
          />
        ))}
      </Entry>
    </Leaf>
  )
}

const EmptyBench = ({ mayEdit }: { mayEdit: boolean }) => (
  <Leaf>
    <PageHead
      folio="A new workshop"
      title="The book is empty. Start with one vehicle."
      lead="Describe the engine, bring the table it runs on, and drive. Evenburn shows what each log proves, cell by cell."
    />
    <Entry
      aside={
        <Note icon="caution" kind="caution" head="Before you begin">
          <p>A wrong fuel table can destroy an engine or start a fire. Run engines outdoors or with extraction.</p>
          <p>Changing emission equipment or calibration may be unlawful on the road where you live.</p>
        </Note>
      }
    >
      {mayEdit ? (
        <Empty
          title="Describe the engine"
          action={
            <ButtonLink variant="solid" to={paths.newVehicle()}>
              Add a vehicle
            </ButtonLink>
          }
        >
          Displacement, injectors and fuel. Then bring the table, then upload a log.
        </Empty>
      ) : (
        <Empty title="No vehicle of yours is here yet">
          Whoever invited you puts you on a vehicle; it appears here then.
        </Empty>
      )}
    </Entry>
  </Leaf>
)
