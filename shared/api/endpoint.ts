import type { z } from 'zod'
import type { Act } from './roles.ts'

export type Method = 'GET' | 'POST' | 'PUT' | 'PATCH' | 'DELETE'

/**
 * One request of the API, once for the server (server/http/mount.ts) and the client (src/api/client.ts).
 *
 * `path` is relative to /api/v1. `act` names the row of the policy table (roles.ts); its scope decides what is looked up:
 * a page act needs the parameter `code`, a group act the parameter `group`. `ifMatch` requires an If-Match header (428
 * without, 412 where stale). `idempotent` honours an Idempotency-Key. A response schema of z.undefined() answers 204.
 */
export interface Endpoint<P extends z.ZodType, Q extends z.ZodType, B extends z.ZodType, R extends z.ZodType> {
  method: Method
  path: `/${string}`
  act: Act
  params: P
  query: Q
  body: B
  response: R
  ifMatch: boolean
  idempotent: boolean
  status: number
}

type Definition<P extends z.ZodType, Q extends z.ZodType, B extends z.ZodType, R extends z.ZodType> = Pick<
  Endpoint<P, Q, B, R>,
  'method' | 'path' | 'act' | 'params' | 'query' | 'body' | 'response'
> & { ifMatch?: boolean; idempotent?: boolean; status?: number }

/** Declares one request. Use `none` (shared/api/common.ts) where there are no parameters, query or body. */
export function endpoint<P extends z.ZodType, Q extends z.ZodType, B extends z.ZodType, R extends z.ZodType>(
  definition: Definition<P, Q, B, R>,
): Endpoint<P, Q, B, R> {
  return {
    ifMatch: false,
    idempotent: false,
    status: definition.method === 'POST' ? 201 : 200,
    ...definition,
  }
}

/** Any endpoint, where its types do not matter (lists of routes, the policy test). */
export type AnyEndpoint = Endpoint<z.ZodType, z.ZodType, z.ZodType, z.ZodType>
