/** A proposal that is being learned, or that could not be: what is going on, and what to do. */
import type { Proposal } from '../../../shared/contract/proposals.ts'
import { formatNumber } from '../../lib/format.ts'
import { paths } from '../../lib/paths.ts'
import { useCan } from '../../lib/session.ts'
import { Banner } from '../../ui/banner.tsx'
import { Button, ButtonLink } from '../../ui/button.tsx'
import { PageHead } from '../../ui/leaf.tsx'
import { Progress } from '../../ui/progress.tsx'
import { useCancelProposal } from './queries.ts'

export function WorkbenchWaiting({ proposal, vehicleId }: { proposal: Proposal; vehicleId: string }) {
  const cancel = useCancelProposal(proposal.id)
  const mayEdit = useCan('proposal:edit')
  const again = (
    <ButtonLink variant="solid" to={paths.workbenchStart(vehicleId)}>
      Choose logs again
    </ButtonLink>
  )
  if (proposal.state === 'queued' || proposal.state === 'learning') {
    return (
      <>
        <PageHead
          folio={`Proposal ${proposal.number}`}
          title={`Learning from ${formatNumber(proposal.logs.length)} ${proposal.logs.length === 1 ? 'log' : 'logs'}`}
          lead="You can leave this page; the bench tells when it is done."
          actions={
            mayEdit ? (
              <Button disabled={cancel.isPending} onClick={() => cancel.mutate()}>
                Stop learning
              </Button>
            ) : null
          }
        />
        <div className="mt-8 max-w-[40rem]">
          <Progress value={proposal.progress} label={proposal.step || 'Waiting for a worker'} />
        </div>
      </>
    )
  }
  const title: Partial<Record<Proposal['state'], string>> = {
    refused: 'These logs cannot teach the table',
    failed: 'Learning stopped with a fault',
    cancelled: 'This proposal was laid aside',
  }
  return (
    <>
      <PageHead
        folio={`Proposal ${proposal.number}`}
        title={title[proposal.state] ?? 'This proposal is closed'}
        actions={again}
      />
      {proposal.trouble ? (
        <Banner title={proposal.trouble}>Nothing was changed. The logs and the table are as they were.</Banner>
      ) : null}
    </>
  )
}
