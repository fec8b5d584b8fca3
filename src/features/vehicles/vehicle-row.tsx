/** A vehicle as a line of the ledger: its evidence patch, where it stands, and the numbers that matter. */
import { useQuery } from '@tanstack/react-query'
import type { LogLine } from '../../../shared/contract/logs.ts'
import type { ProposalLine } from '../../../shared/contract/proposals.ts'
import type { RevisionLine } from '../../../shared/contract/tables.ts'
import type { Vehicle } from '../../../shared/contract/vehicles.ts'
import { formatNumber } from '../../lib/format.ts'
import { paths } from '../../lib/paths.ts'
import { TextLink } from '../../ui/button.tsx'
import { Facts } from '../../ui/facts.tsx'
import { EvidencePatch } from '../../ui/heatmap/patch.tsx'
import { proposalQueries } from '../proposals/queries.ts'

interface VehicleRowProps {
  readonly vehicle: Vehicle
  readonly proposals: readonly ProposalLine[]
  readonly revisions: readonly RevisionLine[]
  readonly logs: readonly LogLine[]
}

export function VehicleRow({ vehicle, proposals, revisions, logs }: VehicleRowProps) {
  const learned = proposals.find((proposal) => proposal.counts !== null)
  const detail = useQuery({ ...proposalQueries.detail(learned?.id ?? ''), enabled: learned !== undefined })
  const inEngine = revisions.find((revision) => revision.flashed && revision.kind === 've')
  const surface = detail.data?.surface
  return (
    <article className="grid grid-cols-[auto_1fr_minmax(14rem,20rem)] gap-x-8 gap-y-3 border-b border-rule py-6 phone:grid-cols-1">
      {surface ? (
        <EvidencePatch grid={surface.grid} evidenceS={surface.evidenceS} />
      ) : (
        <div role="img" aria-label="No evidence yet" className="size-[120px] [background:var(--hatch)]" />
      )}
      <div>
        <h3 className="text-head font-semibold">
          <TextLink to={paths.vehicle(vehicle.id)}>{vehicle.name}</TextLink>
        </h3>
        <p className="text-ink-quiet">{vehicle.description}</p>
        {vehicle.owners.length > 0 ? (
          <p className="text-ink-quiet">Owner {vehicle.owners.map((owner) => owner.name).join(', ')}.</p>
        ) : null}
      </div>
      <Facts
        items={[
          { label: 'In the engine', value: inEngine ? `Revision ${inEngine.number}` : 'not recorded' },
          {
            label: 'Cells known',
            value: learned?.counts ? formatNumber(learned.counts.known) : '0',
            unit: learned?.counts ? `of ${learned.counts.total}` : '',
          },
          { label: 'Logs', value: formatNumber(logs.length) },
        ]}
      />
    </article>
  )
}
