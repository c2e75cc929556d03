import express, { type Request, type Response } from 'express'
import type { z } from 'zod'
import type { Limits } from '#server/limits.ts'
import { AppError, type ProblemDetail } from './app-error.ts'

/** One entry for each fault zod found; the path as `remarks.0.text`. */
export const detailsOf = (error: z.ZodError): ProblemDetail[] =>
  error.issues.slice(0, 100).map((issue) => ({
    code: issue.code ?? 'invalid',
    message: issue.message,
    path: issue.path.map(String).join('.'),
  }))

/** Parameters of the address. One that cannot be right is an address at which there is nothing. */
export function readParams<S extends z.ZodType>(
  schema: S,
  params: Request['params'],
): { ok: true; value: z.output<S> } | { ok: false } {
  const parsed = schema.safeParse({ ...params })
  return parsed.success ? { ok: true, value: parsed.data } : { ok: false }
}

/** The query, parsed by WHATWG rules: a key given several times is a list, nothing else is ever an object. */
export function readQuery<S extends z.ZodType>(schema: S, request: Request): z.output<S> {
  const start = request.originalUrl.indexOf('?')
  const given = new URLSearchParams(start < 0 ? '' : request.originalUrl.slice(start))
  const values = Object.fromEntries(
    [...new Set(given.keys())].map((key) => {
      const all = given.getAll(key)
      return [key, all.length === 1 ? all[0] : all]
    }),
  )
  const parsed = schema.safeParse(values)
  if (parsed.success) return parsed.data
  throw new AppError('bad-request', 'The query of this address is not understood.', { errors: detailsOf(parsed.error) })
}

/** True where a message has a body (RFC 9112 6.3). */
const hasBody = (request: Request) =>
  request.headers['transfer-encoding'] !== undefined || Number(request.headers['content-length'] ?? 0) > 0

/** Deepest nesting of brackets outside of strings; by bytes, so that it costs nothing to say no. */
function depthOf(json: Uint8Array): number {
  let [depth, deepest, inString] = [0, 0, false]
  for (let i = 0; i < json.length; i++) {
    const byte = json[i]
    if (inString) {
      if (byte === 0x5c) i++
      else if (byte === 0x22) inString = false
    } else if (byte === 0x22) inString = true
    else if (byte === 0x7b || byte === 0x5b) deepest = Math.max(deepest, ++depth)
    else if (byte === 0x7d || byte === 0x5d) depth--
  }
  return deepest
}

/** Reads a JSON body into request.body; too deep ones, and keys that reach for a prototype, are refused. */
export function jsonReader(limits: Limits) {
  const parse = express.json({
    limit: limits.http.bodyBytes,
    inflate: false,
    type: 'application/json',
    verify: (_request, _response, bytes) => {
      if (depthOf(bytes) > limits.http.bodyDepth) throw new AppError('bad-request', 'The body is nested too deeply.')
    },
    reviver: (key: string, value: unknown) => {
      if (key === '__proto__') throw new SyntaxError('__proto__ is no name of a field.')
      return value
    },
  })
  return (request: Request, response: Response) =>
    new Promise<void>((resolve, reject) => {
      parse(request, response, (error?: unknown) => (error === undefined ? resolve() : reject(error)))
    })
}

/** The body, after express.json; a body of any other type is refused, never ignored. */
export function readBody<S extends z.ZodType>(schema: S, request: Request): z.output<S> {
  if (hasBody(request) && !request.is('application/json')) {
    throw new AppError('wrong-content-type', 'The body must be JSON (Content-Type: application/json).')
  }
  const parsed = schema.safeParse(hasBody(request) ? request.body : {})
  if (parsed.success) return parsed.data
  throw new AppError('bad-request', 'Some of what was sent is missing or wrong.', { errors: detailsOf(parsed.error) })
}
