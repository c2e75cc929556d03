import type { Express } from 'express'
import supertest from 'supertest'
import { expect } from 'vitest'
import { type ProblemCode, problem, problemStatus } from '#shared/api/problem.ts'

export const apiRoot = '/api/v1'

/** A browser tab: keeps its cookies and says where its requests come from. */
export function tab(app: Express, origin = 'http://127.0.0.1:4180') {
  return supertest.agent(app).set('Origin', origin).set('Sec-Fetch-Site', 'same-origin')
}
export type Tab = ReturnType<typeof tab>

/** Anything that has an answer's parts. */
export interface Answer {
  status: number
  headers: Record<string, string>
  body: unknown
}

/** Checks that an answer is that problem, in the form every problem has; returns it. */
export function expectProblem(answer: Answer, code: ProblemCode) {
  expect(answer.body).toMatchObject({ code })
  expect(answer.status).toBe(problemStatus[code])
  expect(answer.headers['content-type']).toMatch(/^application\/problem\+json/)
  expect(answer.headers['cache-control']).toBe('no-store')
  const parsed = problem.parse(answer.body)
  expect(parsed).toMatchObject({ status: answer.status, code, type: `/problems/${code}` })
  expect(parsed.instance).toBe(`urn:request:${answer.headers['x-request-id']}`)
  expect(parsed.title).not.toBe('')
  expect(parsed.detail).not.toBe('')
  return parsed
}
