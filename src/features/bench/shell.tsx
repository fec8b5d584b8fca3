/** The running head and foot around every page behind the sign-in, and the second head of a vehicle. */
import { useQuery } from '@tanstack/react-query'
import { UserRound } from 'lucide-react'
import { Suspense, useState, type ReactNode } from 'react'
import { Link, Navigate, NavLink, Outlet, useLocation, useParams } from 'react-router-dom'
import { can, seesWholeWorkshop, type Permission } from '../../../shared/access.ts'
import type { Me } from '../../../shared/contract/accounts.ts'
import { ApiProblem } from '../../lib/api.ts'
import { paths } from '../../lib/paths.ts'
import { meQuery } from '../../lib/session.ts'
import { Banner } from '../../ui/banner.tsx'
import { Loading } from '../../ui/loading.tsx'
import { noticeQueries } from '../notices/queries.ts'
import { vehicleQueries } from '../vehicles/queries.ts'
import { Brand } from './brand.tsx'

interface Place {
  readonly to: string
  readonly name: string
  readonly needs?: Permission
  readonly end?: boolean
}

const Places = ({ places, label, folded }: { places: readonly Place[]; label: string; folded: boolean }) => (
  <nav
    aria-label={label}
    className={`flex flex-wrap gap-x-6 phone:basis-full phone:flex-col ${folded ? 'phone:hidden' : ''}`}
  >
    {places.map(({ to, name, end = false }) => (
      <NavLink
        key={to}
        to={to}
        end={end}
        className="relative py-2 whitespace-nowrap text-ink-quiet hover:text-ink aria-[current=page]:pl-[13px] aria-[current=page]:font-semibold aria-[current=page]:text-ink aria-[current=page]:before:absolute aria-[current=page]:before:top-1/2 aria-[current=page]:before:left-0 aria-[current=page]:before:-mt-[3px] aria-[current=page]:before:size-[7px] aria-[current=page]:before:bg-copper aria-[current=page]:before:content-['']"
      >
        {name}
      </NavLink>
    ))}
  </nav>
)

const allowed = (me: Me, places: readonly Place[]) => places.filter(({ needs }) => !needs || can(me.roles, needs))

/** Asks who is signed in first; nobody is sent to the sign-in and comes back afterwards. */
function SignedIn({ children }: { children: (me: Me) => ReactNode }) {
  const me = useQuery(meQuery)
  const location = useLocation()
  if (me.isPending) return <Loading what="Opening the workshop" />
  if (me.error instanceof ApiProblem && me.error.status === 401) {
    return <Navigate to={`${paths.signIn()}?to=${encodeURIComponent(location.pathname)}`} replace />
  }
  if (me.isError) return <Banner title={me.error.message}>Load the page again when the server answers.</Banner>
  return children(me.data)
}

function NoticesLink() {
  const unread = useQuery(noticeQueries.unread()).data ?? 0
  return (
    <Link
      to={paths.notices()}
      className={`flex min-h-6 items-center gap-1.5 hover:text-ink ${unread > 0 ? 'font-semibold text-ink' : 'text-ink-quiet'}`}
    >
      Notices{unread > 0 ? <span className="text-copper">{unread}</span> : null}
      {unread > 0 ? <span className="sr-only">unread</span> : null}
    </Link>
  )
}

function Head({ me, below }: { me: Me; below?: (folded: boolean) => ReactNode }) {
  const [folded, setFolded] = useState(true)
  const places = allowed(me, [
    { to: paths.bench(), name: 'Bench', end: true },
    { to: paths.vehicles(), name: 'Vehicles' },
    { to: paths.people(), name: 'People', needs: 'people:read' },
    { to: paths.audit(), name: 'Audit trail', needs: 'audit:read' },
  ])
  return (
    <header>
      <a href="#content" className="sr-only focus:not-sr-only">
        Skip to the content
      </a>
      <div className="flex min-h-14 flex-wrap items-center gap-x-8 px-(--leaf-gutter) phone:gap-x-3">
        <Brand />
        <Places places={places} label={me.workshop.name} folded={folded} />
        <div className="ml-auto flex items-center gap-6 phone:gap-4">
          <span className="text-ink-quiet phone:hidden">{me.workshop.name}</span>
          {me.demo ? (
            <Link to={paths.mails()} className="text-ink-quiet hover:text-ink phone:hidden">
              Mails
            </Link>
          ) : null}
          <NoticesLink />
          <Link to={paths.account()} className="flex min-h-6 items-center gap-1.5 text-ink-quiet hover:text-ink">
            <UserRound aria-hidden size={16} strokeWidth={1.75} />
            <span>
              <span className="phone:hidden">{me.person.name}, </span>
              {me.roles[0]}
            </span>
          </Link>
          <button
            type="button"
            aria-expanded={!folded}
            onClick={() => setFolded(!folded)}
            className="hidden min-h-(--control-h) cursor-pointer text-ink-quiet phone:block"
          >
            Contents
          </button>
        </div>
      </div>
      {below?.(folded)}
      <div className="ruled" />
    </header>
  )
}

const Foot = ({ end }: { end: string }) => (
  <footer className="mx-(--leaf-gutter) flex flex-wrap justify-between gap-x-6 border-t border-ink pt-3 pb-7 text-small text-ink-faint">
    <span>Never operate Evenburn while driving. Lean mixture under load melts pistons: stop at any doubt.</span>
    <span>{end}</span>
  </footer>
)

const Content = () => (
  <div id="content" tabIndex={-1} className="min-h-[60vh] outline-none">
    <Suspense fallback={<Loading what="Opening the page" />}>
      <Outlet />
    </Suspense>
  </div>
)

export const Shell = () => (
  <SignedIn>
    {(me) => (
      <>
        <Head me={me} />
        <Content />
        <Foot end={me.workshop.name} />
      </>
    )}
  </SignedIn>
)

const vehiclePlaces = (vehicleId: string): Place[] => [
  { to: paths.vehicle(vehicleId), name: 'Overview', end: true },
  { to: paths.engineSheet(vehicleId), name: 'Engine sheet' },
  { to: paths.tables(vehicleId), name: 'Tables' },
  { to: paths.logs(vehicleId), name: 'Logs' },
  { to: paths.workbench(vehicleId), name: 'Workbench', needs: 'proposal:read' },
  { to: paths.revisions(vehicleId), name: 'Revisions' },
]

export function VehicleShell() {
  const { vehicleId = '' } = useParams()
  return <SignedIn>{(me) => <InVehicle me={me} vehicleId={vehicleId} />}</SignedIn>
}

function InVehicle({ me, vehicleId }: { me: Me; vehicleId: string }) {
  const vehicle = useQuery(vehicleQueries.detail(vehicleId))
  const places = allowed(me, vehiclePlaces(vehicleId)).filter(
    ({ name }) => seesWholeWorkshop(me.roles) || (name !== 'Tables' && name !== 'Workbench'),
  )
  return (
    <>
      <Head
        me={me}
        below={(folded) => (
          <div className="flex min-h-11 flex-wrap items-center gap-x-8 border-t border-rule px-(--leaf-gutter)">
            <b className="py-2 whitespace-nowrap">{vehicle.data?.name ?? 'Vehicle'}</b>
            <Places places={places} label={vehicle.data?.name ?? 'Vehicle'} folded={folded} />
          </div>
        )}
      />
      {vehicle.isError ? (
        <div className="px-(--leaf-gutter)">
          <Banner title={vehicle.error.message}>It may belong to another workshop, or you are not on it.</Banner>
        </div>
      ) : (
        <Content />
      )}
      <Foot end={vehicle.data?.name ?? me.workshop.name} />
    </>
  )
}
