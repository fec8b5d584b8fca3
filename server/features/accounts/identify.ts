/** Who speaks: the signed cookie that names a session row, or an access token in the Authorization header. */
import { jwtVerify, SignJWT } from 'jose'
import type { CookieOptions, Request, Response } from 'express'
import type { Role } from '../../../shared/access.ts'
import type { Deps } from '../../deps.ts'
import type { Actor } from '../../platform/http/actor.ts'
import { hashSecret } from './secrets.ts'
import { actorOfSession, actorOfToken, touchToken } from './store.ts'

export const cookieName = 'evenburn_session'
export const sessionDays = 30

function cookieOptions(deps: Deps): CookieOptions {
  return { httpOnly: true, sameSite: 'lax', secure: deps.config.publicUrl.startsWith('https:'), path: '/' }
}

export async function setSessionCookie(deps: Deps, res: Response, sessionId: string): Promise<void> {
  const token = await new SignJWT({})
    .setProtectedHeader({ alg: 'HS256' })
    .setSubject(sessionId)
    .setExpirationTime(new Date(deps.clock.now().getTime() + sessionDays * 86_400_000))
    .sign(deps.config.sessionSecret)
  res.cookie(cookieName, token, { ...cookieOptions(deps), maxAge: sessionDays * 86_400_000 })
}

export const clearSessionCookie = (deps: Deps, res: Response): void => {
  res.clearCookie(cookieName, cookieOptions(deps))
}

function cookieOf(req: Request): string | null {
  const pair = (req.headers.cookie ?? '').split(/;\s*/).find((each) => each.startsWith(`${cookieName}=`))
  return pair ? pair.slice(cookieName.length + 1) : null
}

async function sessionIdOf(deps: Deps, cookie: string): Promise<string | null> {
  try {
    const { payload } = await jwtVerify(cookie, deps.config.sessionSecret, {
      algorithms: ['HS256'],
      currentDate: deps.clock.now(),
    })
    return payload.sub ?? null
  } catch {
    return null
  }
}

/** Null for nobody; a forged, expired or revoked credential is nobody too. */
export async function identify(deps: Deps, req: Request): Promise<Actor | null> {
  const header = req.headers.authorization
  if (header !== undefined) {
    const secret = /^Bearer (evb_[\w-]{20,100})$/.exec(header)?.[1]
    if (!secret) return null
    const found = await actorOfToken(deps.db, hashSecret(secret))
    if (!found || !found.roles.includes(found.tokenRole)) return null
    await touchToken(deps.db, found.tokenId, deps.clock.now())
    const { tokenId: _id, tokenRole, ...person } = found
    return { ...person, roles: [tokenRole], sessionId: null }
  }
  const cookie = cookieOf(req)
  const sessionId = cookie === null ? null : await sessionIdOf(deps, cookie)
  return sessionId === null ? null : actorOfSession(deps.db, sessionId, deps.clock.now())
}

export type TokenActor = Omit<Actor, 'sessionId'> & { readonly tokenId: string; readonly tokenRole: Role }
