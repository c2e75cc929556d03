import { eq } from 'drizzle-orm'
import type { Express } from 'express'
import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import { people } from '#drizzle/schema/index.ts'
import { endpointOf } from '#server/http/mount.ts'
import * as cardsApi from '#shared/api/cards.ts'
import * as draftsApi from '#shared/api/drafts.ts'
import type { AnyEndpoint } from '#shared/api/endpoint.ts'
import * as groupsApi from '#shared/api/groups.ts'
import * as pagesApi from '#shared/api/pages.ts'
import * as peopleApi from '#shared/api/people.ts'
import * as reviewsApi from '#shared/api/reviews.ts'
import * as revisionsApi from '#shared/api/revisions.ts'
import * as sessionApi from '#shared/api/session.ts'
import * as sourcesApi from '#shared/api/sources.ts'
import { createTestApp, type TestApp } from '#tests/support/app.ts'
import { apiRoot, expectProblem, type Tab } from '#tests/support/http.ts'
import type { TestGroup } from '#tests/support/users.ts'
import {
  type Expected,
  groupRoutes,
  otherRoutes,
  pageRoutes,
  relationOf,
  siteRoutes,
  states,
  type ViewerName,
  viewers,
} from './policy-expectations.ts'
import { makePolicyPages, type PolicyPage } from './policy-pages.ts'

let t: TestApp
let group: TestGroup
let pages: PolicyPage[]
let agents: Record<ViewerName, Tab>

beforeAll(async () => {
  t = await createTestApp()
  const who = {
    disabled: await t.people.person('Dis Abled'),
    stranger: await t.people.person('Str Anger'),
    away: await t.people.person('A Way'),
    administrator: await t.people.person('Ad Min', { administrator: true }),
    reader: await t.people.person('Rea Der'),
    contributor: await t.people.person('Con Trib'),
    maintainer: await t.people.person('Main Tainer'),
  }
  group = await t.people.group('Kiln Lab', 'KLN', [
    [who.reader, 'reader'],
    [who.contributor, 'contributor'],
    [who.maintainer, 'maintainer'],
  ])
  await t.people.group('Other Lab', 'OTH', [[who.away, 'contributor']])
  pages = await makePolicyPages(t.db, group, who.contributor.id)
  agents = {
    anonymous: t.people.signedOut(),
    disabled: await t.people.signedIn(who.disabled),
    stranger: await t.people.signedIn(who.stranger),
    away: await t.people.signedIn(who.away),
    administrator: await t.people.signedIn(who.administrator),
    reader: await t.people.signedIn(who.reader),
    contributor: await t.people.signedIn(who.contributor),
    maintainer: await t.people.signedIn(who.maintainer),
  }
  await t.db.update(people).set({ disabled: true }).where(eq(people.id, who.disabled.id))
})
afterAll(() => t.close())

const nameOf = (endpoint: AnyEndpoint) => `${endpoint.method} ${endpoint.path}`

/** Every handler of every route of the live API router, in order. */
const layers = () =>
  t.api.router.stack.flatMap((layer) => {
    const { route } = layer
    return route ? route.stack.map((inner) => ({ path: route.path, method: inner.method, handle: inner.handle })) : []
  })
const served = () => layers().flatMap(({ handle }) => endpointOf(handle) ?? [])

/** Every route path of an express stack that belongs to no API, however deep. */
function routePaths(stack: Express['router']['stack']): string[] {
  return stack.flatMap((layer) => {
    if (layer.route) return [layer.route.path]
    const inner: unknown = 'stack' in layer.handle ? layer.handle.stack : null
    return Array.isArray(inner) && layer.handle !== t.api.router ? routePaths(inner) : []
  })
}

/** Something for each parameter; none of the ids exists. */
const values: Record<string, string> = {
  mark: '1.0.0',
  person: '999999',
  invitation: '999999',
  source: '999999',
  link: '999999',
  token: 'A'.repeat(43),
}
function addressOf(endpoint: AnyEndpoint, of: { code?: string; group?: string } = {}): string {
  const fill = (_: string, name: string) => {
    const value = { ...values, ...of }[name]
    if (value === undefined) throw new Error(`The test has no value for :${name}`)
    return value
  }
  return apiRoot + endpoint.path.replace(/:(\w+)/g, fill)
}

/**
 * Asks with a key in the query that no contract knows. Whoever may do it is then told 428 where If-Match is needed, else
 * 400 about that very key: both come after the policy and before anything happens. Everybody else gets their refusal.
 */
async function ask(agent: Tab, endpoint: AnyEndpoint, address: string) {
  const method = endpoint.method.toLowerCase() as 'get' | 'post' | 'put' | 'patch' | 'delete'
  return agent[method](`${address}?unexpected=1`)
}

const refusals = { 401: 'not-signed-in', 403: 'may-not', 404: 'not-found' } as const

function check(answer: Awaited<ReturnType<typeof ask>>, expected: Expected, ifMatch: boolean, what: string): void {
  try {
    if (expected !== 200) {
      const problem = expectProblem(answer, refusals[expected])
      // A refusal tells nothing of what is there.
      expect(JSON.stringify(problem)).not.toMatch(/Hidden|Kiln|KLN|kiln-lab/)
      expect(answer.headers.etag).toBeUndefined()
    } else if (ifMatch) {
      expectProblem(answer, 'needs-if-match')
    } else {
      const { errors } = expectProblem(answer, 'bad-request')
      expect(errors).toEqual([expect.objectContaining({ code: 'unrecognized_keys' })])
      expect(errors?.[0]?.message).toContain('unexpected')
    }
  } catch (error) {
    throw new Error(`${what}: expected ${expected}, got ${answer.status} ${answer.body.code}`, { cause: error })
  }
}

describe('the list of routes', () => {
  test('every route of the API serves a contract; whatever else answers only says that the method is wrong', async () => {
    for (const { path, method, handle } of layers()) {
      if (method !== undefined) expect(endpointOf(handle), `${method} ${path}`).not.toBeNull()
    }
    const others = layers().filter(({ method }) => method === undefined)
    for (const { path } of others) {
      const answer = await agents.administrator.options(apiRoot + path.replace(/:(\w+)/g, '1'))
      expectProblem(answer, 'method-not-allowed')
    }
  })

  test('each is served once, and only with the method of its contract', () => {
    const names = layers().flatMap(({ path, method }) => (method ? [`${method.toUpperCase()} ${path}`] : []))
    expect(new Set(names).size).toBe(names.length)
    expect(served().map(nameOf)).toEqual(names)
  })

  test('each has a row of expectations, and each row a route', () => {
    const expected = [...Object.keys(siteRoutes), ...Object.keys(groupRoutes), ...Object.keys(pageRoutes)]
    expect(served().map(nameOf).sort()).toEqual(expected.sort())
  })

  test('every contract is served', () => {
    const modules = [
      cardsApi,
      draftsApi,
      groupsApi,
      pagesApi,
      peopleApi,
      reviewsApi,
      revisionsApi,
      sessionApi,
      sourcesApi,
    ]
    const contracts = modules.flatMap((module) =>
      Object.values(module as Record<string, unknown>).filter(
        (value): value is AnyEndpoint =>
          typeof value === 'object' && value !== null && 'act' in value && 'path' in value && 'method' in value,
      ),
    )
    expect(contracts.map(nameOf).sort()).toEqual(served().map(nameOf).sort())
  })

  test('nothing but these is routed outside the API', () => {
    expect(routePaths(t.app.router.stack)).toEqual(otherRoutes)
  })
})

describe.each(viewers)('%s', (viewer) => {
  test('in the whole library', async () => {
    for (const endpoint of served()) {
      const row = siteRoutes[nameOf(endpoint)]
      if (row) check(await ask(agents[viewer], endpoint, addressOf(endpoint)), row[viewer], false, nameOf(endpoint))
    }
  })

  test('in a group, and in one that does not exist', async () => {
    const absent: Expected = viewer === 'anonymous' || viewer === 'disabled' ? 401 : 404
    for (const endpoint of served()) {
      const row = groupRoutes[nameOf(endpoint)]
      if (!row) continue
      const there = await ask(agents[viewer], endpoint, addressOf(endpoint, { group: group.slug }))
      check(there, row[viewer], false, nameOf(endpoint))
      for (const name of ['no-such-group', 'Not%20A%20Slug']) {
        const nowhere = await ask(agents[viewer], endpoint, addressOf(endpoint, { group: name }))
        check(nowhere, absent, false, `${nameOf(endpoint)} of ${name}`)
      }
    }
  })

  test('on a page, in each of its states and with each read access, and on one that does not exist', async () => {
    const absent: Expected = viewer === 'anonymous' || viewer === 'disabled' ? 401 : 404
    let asked = 0
    for (const endpoint of served()) {
      const row = pageRoutes[nameOf(endpoint)]
      if (!row) continue
      for (const { code, state, access } of pages) {
        const expected = row.matrix[relationOf(viewer, access)][states.indexOf(state)]
        if (expected === undefined) throw new Error(`No expectation for ${state}`)
        const answer = await ask(agents[viewer], endpoint, addressOf(endpoint, { code }))
        check(answer, expected, row.ifMatch ?? false, `${nameOf(endpoint)} on ${state}, open to ${access}`)
        asked++
      }
      for (const code of ['KLN-999', 'not-a-code']) {
        const nowhere = await ask(agents[viewer], endpoint, addressOf(endpoint, { code }))
        check(nowhere, absent, false, `${nameOf(endpoint)} on ${code}`)
      }
    }
    expect(asked).toBe(Object.keys(pageRoutes).length * 21)
  })
})

describe('both an administrator and a member', () => {
  test('may in the group what either may, and on its pages only what the member may', async () => {
    const both = await t.people.person('Both Roles', { administrator: true })
    const lab = await t.people.group('Both Lab', 'BTH', [[both, 'reader']])
    const [page] = await makePolicyPages(t.db, lab, both.id)
    const agent = await t.people.signedIn(both)
    const expected = {
      'GET /groups/:group': 200,
      'POST /groups/:group/invitations': 200,
      'POST /groups/:group/pages': 403,
      'GET /pages/:code/draft': 200,
      'PATCH /pages/:code': 403,
    } as const
    for (const [name, outcome] of Object.entries(expected)) {
      const endpoint = served().find((candidate) => nameOf(candidate) === name)
      if (!endpoint) throw new Error(`${name} is not served`)
      const answer = await ask(agent, endpoint, addressOf(endpoint, { group: lab.slug, code: page?.code }))
      check(answer, outcome, false, name)
    }
  })
})
