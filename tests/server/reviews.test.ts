import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import { listReviews, type ReviewRow } from '#shared/api/reviews.ts'
import { apiRoot, expectProblem, type Tab } from '#tests/support/http.ts'
import { createLibrary, type Library, oscillator, retype } from '#tests/support/pages.ts'

let lib: Library
let turned: string
let fresh: string
beforeAll(async () => {
  lib = await createLibrary()
  turned = await lib.publicPage('open')
  await lib.edit(turned, lib.who.max.id, retype(oscillator({ hard: true }).equations))
  await lib.send(lib.tabs.cora, turned, 'Turns hard')
  fresh = await lib.makePage(lib.tabs.mara)
  await lib.send(lib.tabs.mara, fresh, 'First go')
})
afterAll(() => lib.close())

async function reviews(by: Tab) {
  const answer = await by.get(`${apiRoot}/reviews`)
  expect(answer.status).toBe(200)
  return listReviews.response.parse(answer.body)
}
const told = (rows: ReviewRow[]) => rows.map((row) => [row.code, row.mayApprove, row.whyNot])

describe('reviews', () => {
  test('to check are those of the person’s groups, with whether and why not', async () => {
    expect(told((await reviews(lib.tabs.mara)).toCheck)).toEqual([[turned, true, null]])
    expect(told((await reviews(lib.tabs.max)).toCheck)).toEqual([
      [fresh, true, null],
      [turned, false, 'You wrote in it.'],
    ])
    const reader = [
      [fresh, false, 'Only a maintainer of the group can approve it.'],
      [turned, false, 'Only a maintainer of the group can approve it.'],
    ]
    expect(told((await reviews(lib.tabs.rhea)).toCheck)).toEqual(reader)
  })

  test('sent by the person stand apart', async () => {
    expect(told((await reviews(lib.tabs.cora)).sentByMe)).toEqual([[turned, false, 'You wrote in it.']])
    expect(told((await reviews(lib.tabs.mara)).sentByMe)).toEqual([[fresh, false, 'You wrote in it.']])
    expect((await reviews(lib.tabs.rhea)).sentByMe).toEqual([])
  })

  test('say what the revision in force says, to tell a verdict that turns', async () => {
    const { toCheck } = await reviews(lib.tabs.mara)
    expect(toCheck[0]).toMatchObject({
      wasKind: 'soft',
      revision: { card: { kind: 'hard' }, mark: '2.0.0', base: '1.0.0' },
    })
    const { sentByMe } = await reviews(lib.tabs.mara)
    expect(sentByMe[0]?.wasKind).toBeNull()
  })

  test('settled are the last ones of the person’s groups', async () => {
    expect(
      (await reviews(lib.tabs.rhea)).settled.map((row) => [row.code, row.revision.mark, row.revision.state]),
    ).toEqual([[turned, '1.0.0', 'in-force']])
  })

  test('of other groups are nobody else’s business, not even an administrator’s', async () => {
    const nothing = { toCheck: [], sentByMe: [], settled: [] }
    expect(await reviews(lib.tabs.olaf)).toEqual(nothing)
    expect(await reviews(lib.tabs.ada)).toEqual(nothing)
    expectProblem(await lib.tabs.nobody.get(`${apiRoot}/reviews`), 'not-signed-in')
  })
})
