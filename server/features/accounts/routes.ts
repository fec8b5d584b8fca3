/** Binds the accounts endpoints; no logic. */
import * as contract from '../../../shared/contract/accounts.ts'
import type { Deps } from '../../deps.ts'
import { on, type Binder } from '../../platform/http/on.ts'
import type { Request, Response } from 'express'
import { clearSessionCookie, setSessionCookie } from './identify.ts'
import * as audit from './audit.ts'
import * as members from './members.ts'
import * as accounts from './service.ts'

const done = { done: true } as const
const addressOf = (req: Request): string => req.socket.remoteAddress ?? 'unknown'

export function mountAccounts(binder: Binder, deps: Deps): void {
  const started = async (res: Response, { sessionId, me }: accounts.Started) => {
    await setSessionCookie(deps, res, sessionId)
    return me
  }
  on(
    binder,
    contract.getSetup,
  )(async () => ({
    needed: await accounts.setupNeeded(deps),
    demo: deps.config.demo,
    demoMailbox: deps.config.demoMailbox,
  }))
  on(binder, contract.setUp)(async ({ body, res }) => started(res, await accounts.setUp(deps, body)))
  on(
    binder,
    contract.signIn,
  )(async ({ body, req, res }) => started(res, await accounts.signIn(deps, body, addressOf(req))))
  on(
    binder,
    contract.signOut,
  )(async ({ actor, res }) => {
    await accounts.signOut(deps, actor)
    clearSessionCookie(deps, res)
    return done
  })
  on(
    binder,
    contract.signOutEverywhere,
  )(async ({ actor, res }) => {
    await accounts.signOutEverywhere(deps, actor)
    clearSessionCookie(deps, res)
    return done
  })
  on(binder, contract.getMe)(({ actor }) => accounts.describeMe(deps, actor))
  on(binder, contract.changeWorkshop)(({ actor, body }) => accounts.changeWorkshop(deps, actor, body.workshopId))
  on(
    binder,
    contract.askPasswordReset,
  )(async ({ body, req }) => {
    await accounts.askPasswordReset(deps, body.email, addressOf(req))
    return done
  })
  on(
    binder,
    contract.resetPassword,
  )(async ({ params, body, req }) => {
    await accounts.resetPassword(deps, params.token, body.password, addressOf(req))
    return done
  })
  on(binder, contract.listPeople)(async ({ actor }) => ({ people: await members.listPeople(deps, actor) }))
  on(
    binder,
    contract.changeRoles,
  )(({ actor, params, body }) => members.changeRoles(deps, actor, params.personId, body.roles))
  on(
    binder,
    contract.removePerson,
  )(async ({ actor, params }) => {
    await members.removePerson(deps, actor, params.personId)
    return done
  })
  on(
    binder,
    contract.listInvitations,
  )(async ({ actor }) => ({ invitations: await members.listInvitations(deps, actor) }))
  on(binder, contract.invite)(({ actor, body }) => members.invite(deps, actor, body))
  on(
    binder,
    contract.withdrawInvitation,
  )(async ({ actor, params }) => {
    await members.withdrawInvitation(deps, actor, params.invitationId)
    return done
  })
  on(binder, contract.readInvitation)(({ params }) => members.readInvitation(deps, params.token))
  on(
    binder,
    contract.acceptInvitation,
  )(async ({ params, body, req, res }) =>
    started(res, await members.acceptInvitation(deps, params.token, body, addressOf(req))),
  )
  on(binder, contract.changeWorkshopSettings)(({ actor, body }) => members.changeSettings(deps, actor, body))
  on(binder, contract.listTokens)(async ({ actor }) => ({ tokens: await members.listTokens(deps, actor) }))
  on(binder, contract.createToken)(({ actor, body }) => members.createToken(deps, actor, body))
  on(
    binder,
    contract.revokeToken,
  )(async ({ actor, params }) => {
    await members.revokeToken(deps, actor, params.tokenId)
    return done
  })
  on(binder, contract.listAudit)(({ actor, query }) => audit.listAudit(deps, actor, query))
  on(binder, contract.exportAudit)(({ actor, query }) => audit.exportAudit(deps, actor, query))
  on(binder, contract.listDemoMails)(async () => ({ mails: await accounts.listDemoMails(deps) }))
}
