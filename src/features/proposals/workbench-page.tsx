/** The workbench: the proposal named in the address, else the newest that is not finished, else the choice of logs. */
import { useQuery } from '@tanstack/react-query'
import { useParams } from 'react-router-dom'
import { usePageTitle } from '../../lib/page-title.ts'
import { Banner } from '../../ui/banner.tsx'
import { Leaf } from '../../ui/leaf.tsx'
import { Loading } from '../../ui/loading.tsx'
import { proposalQueries } from './queries.ts'
import { WorkbenchOpen } from './workbench-open.tsx'
import { WorkbenchStart } from './workbench-start.tsx'
import { WorkbenchWaiting } from './workbench-waiting.tsx'

export default function WorkbenchPage() {
  const { vehicleId = '', proposalId } = useParams()
  usePageTitle('Workbench')
  if (proposalId === 'new') return <Starting vehicleId={vehicleId} />
  return proposalId ? <One vehicleId={vehicleId} proposalId={proposalId} /> : <Newest vehicleId={vehicleId} />
}

const Starting = ({ vehicleId }: { vehicleId: string }) => (
  <Leaf>
    <WorkbenchStart vehicleId={vehicleId} />
  </Leaf>
)

function Newest({ vehicleId }: { vehicleId: string }) {
  const list = useQuery(proposalQueries.list(vehicleId))
  if (list.isPending) return <Loading what="Looking for proposals" />
  if (list.isError) return <Problem message={list.error.message} />
  const waiting = list.data.proposals.find(
    ({ state }) => state === 'open' || state === 'queued' || state === 'learning',
  )
  return waiting ? <One vehicleId={vehicleId} proposalId={waiting.id} /> : <Starting vehicleId={vehicleId} />
}

function One({ vehicleId, proposalId }: { vehicleId: string; proposalId: string }) {
  const proposal = useQuery(proposalQueries.detail(proposalId))
  if (proposal.isPending) return <Loading what="Fetching the proposal" />
  if (proposal.isError) return <Problem message={proposal.error.message} />
  const { surface } = proposal.data
  if (surface && (proposal.data.state === 'open' || proposal.data.state === 'revised')) {
    return <WorkbenchOpen key={proposalId} proposal={{ ...proposal.data, surface }} vehicleId={vehicleId} />
  }
  return (
    <Leaf>
      <WorkbenchWaiting proposal={proposal.data} vehicleId={vehicleId} />
    </Leaf>
  )
}

const Problem = ({ message }: { message: string }) => (
  <Leaf>
    <Banner title={message}>Load the page again.</Banner>
  </Leaf>
)
