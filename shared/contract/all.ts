/** Every endpoint there is, by name: the server's mounting, the access matrix and the OpenAPI document loop over it. */
import type { AnyEndpoint } from '../endpoint.ts'
import * as accounts from './accounts.ts'
import * as exports from './exports.ts'
import * as logs from './logs.ts'
import * as notices from './notices.ts'
import * as proposals from './proposals.ts'
import * as reviews from './reviews.ts'
import * as tables from './tables.ts'
import * as vehicles from './vehicles.ts'

const contracts = { accounts, vehicles, notices, tables, logs, proposals, reviews, exports }

const isEndpoint = (value: unknown): value is AnyEndpoint =>
  typeof value === 'object' && value !== null && 'path' in value && 'method' in value && 'access' in value

export interface NamedEndpoint {
  readonly noun: string
  readonly name: string
  readonly endpoint: AnyEndpoint
}

export const allEndpoints: readonly NamedEndpoint[] = Object.entries(contracts).flatMap(([noun, contract]) =>
  Object.entries(contract).flatMap(([name, value]) =>
    isEndpoint(value) ? [{ noun, name, endpoint: value as AnyEndpoint }] : [],
  ),
)
