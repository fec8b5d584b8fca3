/** The whole route table; every page is loaded when it is first opened. */
import type { ComponentType } from 'react'
import { createBrowserRouter } from 'react-router-dom'
import { FaultPage, NotFoundPage } from './features/bench/fault-page.tsx'
import { Shell, VehicleShell } from './features/bench/shell.tsx'
import { Loading } from './ui/loading.tsx'

const page = (load: () => Promise<{ default: ComponentType }>) => ({
  lazy: async () => ({ Component: (await load()).default }),
})
const hydrateFallbackElement = <Loading what="Opening the page" />

export const router = createBrowserRouter([
  {
    errorElement: <FaultPage />,
    hydrateFallbackElement,
    children: [
      { path: '/sign-in', ...page(() => import('./features/accounts/sign-in-page.tsx')) },
      { path: '/setup', ...page(() => import('./features/accounts/setup-page.tsx')) },
      { path: '/reset', ...page(() => import('./features/accounts/ask-reset-page.tsx')) },
      { path: '/reset/:token', ...page(() => import('./features/accounts/reset-page.tsx')) },
      { path: '/invitation/:token', ...page(() => import('./features/accounts/invitation-page.tsx')) },
      { path: '/demo/mails', ...page(() => import('./features/accounts/mails-page.tsx')) },
      {
        element: <Shell />,
        children: [
          { path: '/', ...page(() => import('./features/bench/bench-page.tsx')) },
          { path: '/people', ...page(() => import('./features/accounts/people-page.tsx')) },
          { path: '/audit', ...page(() => import('./features/accounts/audit-page.tsx')) },
          { path: '/notices', ...page(() => import('./features/notices/notices-page.tsx')) },
          { path: '/account', ...page(() => import('./features/accounts/account-page.tsx')) },
          { path: '/vehicles', ...page(() => import('./features/vehicles/vehicles-page.tsx')) },
          { path: '/vehicles/new', ...page(() => import('./features/vehicles/new-vehicle-page.tsx')) },
        ],
      },
      {
        path: '/vehicles/:vehicleId',
        element: <VehicleShell />,
        children: [
          { index: true, ...page(() => import('./features/vehicles/vehicle-page.tsx')) },
          { path: 'engine-sheet', ...page(() => import('./features/vehicles/engine-sheet-page.tsx')) },
          { path: 'tables', ...page(() => import('./features/tables/tables-page.tsx')) },
          { path: 'logs', ...page(() => import('./features/logs/logs-page.tsx')) },
          { path: 'logs/:logId', ...page(() => import('./features/logs/log-page.tsx')) },
          { path: 'workbench', ...page(() => import('./features/proposals/workbench-page.tsx')) },
          { path: 'workbench/:proposalId', ...page(() => import('./features/proposals/workbench-page.tsx')) },
          {
            path: 'workbench/:proposalId/carry-over',
            ...page(() => import('./features/proposals/carry-over-page.tsx')),
          },
          { path: 'revisions', ...page(() => import('./features/reviews/revisions-page.tsx')) },
          { path: 'revisions/compare', ...page(() => import('./features/reviews/compare-page.tsx')) },
          { path: 'revisions/:revisionId', ...page(() => import('./features/reviews/revision-page.tsx')) },
          { path: 'read-back', ...page(() => import('./features/exports/read-back-page.tsx')) },
        ],
      },
      { path: '*', element: <NotFoundPage /> },
    ],
  },
])
