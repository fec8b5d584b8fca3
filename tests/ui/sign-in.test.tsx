/** The sign-in page against a fake server whose answers the contract checks. */
import { QueryClientProvider } from '@tanstack/react-query'
import { render, screen } from '@testing-library/react'
import userEvent from '@testing-library/user-event'
import { createMemoryRouter, RouterProvider } from 'react-router-dom'
import { afterEach, describe, expect, test, vi } from 'vitest'
import { getSetup, Me } from '../../shared/contract/accounts.ts'
import { ProblemBody } from '../../shared/problems.ts'
import SignInPage from '../../src/features/accounts/sign-in-page.tsx'
import { newQueryClient } from '../../src/lib/query-client.ts'

const setup = getSetup.response!.parse({ needed: false, demo: false, demoMailbox: false })
const refusal = ProblemBody.parse({
  type: 'https://evenburn.example/problems/sign-in-failed',
  title: 'E-mail address and password do not match an account',
  status: 401,
})
const id = '00000000-0000-4000-8000-000000000001'
const me = Me.parse({
  person: { id, name: 'Ada', email: 'ada@x.example' },
  workshop: { id, name: 'W', allowOwnSignOff: false },
  roles: ['tuner'],
  workshops: [{ id, name: 'W' }],
  demo: false,
})

const answer = (body: unknown, status = 200) =>
  Promise.resolve(new Response(JSON.stringify(body), { status, headers: { 'content-type': 'application/json' } }))

function open(address: string, signIn: () => Promise<Response>) {
  vi.stubGlobal(
    'fetch',
    vi.fn((url: string) => (url.startsWith('/api/setup') ? answer(setup) : signIn())),
  )
  const router = createMemoryRouter(
    [
      { path: '/sign-in', element: <SignInPage /> },
      { path: '*', element: <p>another page</p> },
    ],
    { initialEntries: [address] },
  )
  render(
    <QueryClientProvider client={newQueryClient()}>
      <RouterProvider router={router} />
    </QueryClientProvider>,
  )
  return router
}

async function signIn() {
  await userEvent.type(screen.getByLabelText('E-mail'), 'ada@x.example')
  await userEvent.type(screen.getByLabelText('Password'), 'a long password')
  await userEvent.click(screen.getByRole('button', { name: 'Sign in' }))
}

afterEach(() => vi.unstubAllGlobals())

describe('sign-in', () => {
  test('a refusal is said, and what was typed is kept', async () => {
    open('/sign-in', () => answer(refusal, 401))
    await signIn()
    expect(await screen.findByRole('alert')).toHaveTextContent('do not match an account')
    expect(screen.getByLabelText('E-mail')).toHaveValue('ada@x.example')
  })

  test('the page that was wanted comes next', async () => {
    const router = open('/sign-in?to=%2Fvehicles', () => answer(me))
    await signIn()
    expect(await screen.findByText('another page')).toBeVisible()
    expect(router.state.location.pathname).toBe('/vehicles')
  })

  test('an address of another site is not followed', async () => {
    const router = open('/sign-in?to=%2F%2Felsewhere.example', () => answer(me))
    await signIn()
    expect(await screen.findByText('another page')).toBeVisible()
    expect(router.state.location.pathname).toBe('/')
  })
})
