/** The vehicles a person may see. */
import { useQuery } from '@tanstack/react-query'
import { formatNumber } from '../../lib/format.ts'
import { usePageTitle } from '../../lib/page-title.ts'
import { paths } from '../../lib/paths.ts'
import { useCan } from '../../lib/session.ts'
import { Banner } from '../../ui/banner.tsx'
import { ButtonLink, TextLink } from '../../ui/button.tsx'
import { Empty } from '../../ui/empty.tsx'
import { Entry, Leaf, PageHead } from '../../ui/leaf.tsx'
import { Ledger } from '../../ui/ledger.tsx'
import { Loading } from '../../ui/loading.tsx'
import { vehicleQueries } from './queries.ts'

export default function VehiclesPage() {
  usePageTitle('Vehicles')
  const mayEdit = useCan('vehicle:edit')
  const vehicles = useQuery(vehicleQueries.list())
  if (vehicles.isPending) return <Loading what="Listing the vehicles" />
  if (vehicles.isError) return <Banner title={vehicles.error.message}>Load the page again.</Banner>
  const all = vehicles.data.vehicles
  const add = mayEdit ? (
    <ButtonLink variant="solid" to={paths.newVehicle()}>
      Add a vehicle
    </ButtonLink>
  ) : null
  return (
    <Leaf>
      <PageHead
        folio="Vehicles"
        title={all.length === 1 ? 'One vehicle is in the book' : `${formatNumber(all.length)} vehicles are in the book`}
        actions={add}
      />
      <Entry>
        {all.length === 0 ? (
          <Empty title="No vehicle yet">Describe one, and bring the table it runs on.</Empty>
        ) : (
          <Ledger caption="Vehicles" head={['Name', 'Description', 'Owners', 'Engine sheet']} stack>
            {all.map((vehicle) => (
              <tr key={vehicle.id}>
                <th scope="row">
                  <TextLink to={paths.vehicle(vehicle.id)}>{vehicle.name}</TextLink>
                  {vehicle.archived ? <span className="block text-small text-ink-faint">laid away</span> : null}
                </th>
                <td className="wide-cell">{vehicle.description}</td>
                <td>{vehicle.owners.map((owner) => owner.name).join(', ') || 'none'}</td>
                <td>{vehicle.sheet ? `writing ${vehicle.sheet.number}` : 'not written'}</td>
              </tr>
            ))}
          </Ledger>
        )}
      </Entry>
    </Leaf>
  )
}
