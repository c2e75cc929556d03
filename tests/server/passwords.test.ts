import { hash } from '@node-rs/argon2'
import { eq } from 'drizzle-orm'
import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import { people } from '#drizzle/schema/index.ts'
import { limits } from '#server/limits.ts'
import { isCommonPassword } from '#server/services/common-passwords.ts'
import { hashPassword, needsRehash, passwordMatches } from '#server/services/passwords.ts'
import { createTestApp, type TestApp } from '#tests/support/app.ts'
import { apiRoot, tab } from '#tests/support/http.ts'

let t: TestApp
beforeAll(async () => {
  t = await createTestApp()
})
afterAll(() => t.close())

describe('hashing', () => {
  test('is argon2id with 19 MiB, two passes, one lane, a salt of its own each time', async () => {
    // OWASP's password storage sheet names these as a minimum for argon2id (from memory).
    const [one, two] = [await hashPassword('seven kettles drum'), await hashPassword('seven kettles drum')]
    expect(one).toMatch(/^\$argon2id\$v=19\$m=19456,t=2,p=1\$[A-Za-z0-9+/]{22}\$[A-Za-z0-9+/]{43}$/)
    expect(one).not.toBe(two)
    expect(await passwordMatches(one, 'seven kettles drum')).toBe(true)
    expect(await passwordMatches(one, 'seven kettles druM')).toBe(false)
    expect(await passwordMatches(one, 'seven kettles drum ')).toBe(false)
  })

  test('keeps every character of a long one apart', async () => {
    const long = 'x'.repeat(127)
    const stored = await hashPassword(`${long}a`)
    expect(await passwordMatches(stored, `${long}b`)).toBe(false)
    expect(await passwordMatches(stored, `${long}a`)).toBe(true)
  })

  test('an account without a hash matches nothing, not even what is verified in its place', async () => {
    expect(await passwordMatches(null, 'no account has this password')).toBe(false)
  })

  test('more than the line may hold are told to come back', async () => {
    const stored = await hashPassword('seven kettles drum')
    const all = limits.password.atOnce + limits.password.waiting
    const outcomes = await Promise.allSettled(
      Array.from({ length: all + 3 }, () => passwordMatches(stored, 'seven kettles drum')),
    )
    const refused = outcomes.filter((outcome) => outcome.status === 'rejected')
    expect(refused).toHaveLength(3)
    expect(refused[0]?.reason).toMatchObject({ code: 'not-ready' })
  })

  test('an older, weaker hash is renewed when its owner signs in', async () => {
    const person = await t.people.person('Old Hash')
    const weak = await hash('seven kettles drum', { memoryCost: 8192, timeCost: 1 })
    expect(needsRehash(weak)).toBe(true)
    await t.db.update(people).set({ passwordHash: weak }).where(eq(people.id, person.id))
    const signIn = () =>
      tab(t.app).post(`${apiRoot}/session`).send({ email: person.email, password: 'seven kettles drum' })
    expect((await signIn()).status).toBe(200)
    const [row] = await t.db.select().from(people).where(eq(people.id, person.id))
    expect(needsRehash(row?.passwordHash ?? '')).toBe(false)
    expect((await signIn()).status).toBe(200)
  })
})

describe('passwords that are tried first', () => {
  const about = ['Orla Tindlemoor', 'orla@skellbeck.example']
  test.each([
    'passwordpassword',
    'Password1234567',
    'P@ssw0rdP@ssw0rd!',
    'pass word pass word',
    '123456789012345',
    'qwertyuiopasdfghjkl',
    'aaaaaaaaaaaaaaaa',
    'abababababababab',
    'abcdefghijklmnop',
    'iloveyouiloveyou2024',
    'correct horse battery staple',
    'sunshine princess',
    'Brinkbook-Brinkbook-1',
    'brinkbook administrator',
    'tindlemoor-orla-orla',
    'orla@skellbeck.example',
    'Skellbeck-Tindlemoor',
  ])('%s', (password) => {
    expect(isCommonPassword(password, about)).toBe(true)
  })

  test.each([
    'purple kettle drum nine',
    'vexed otter mends clocks',
    '4f9Kq!zR81mWx02c',
    'slow ramp to the brink',
    'Ärger über löchrige Töpfe',
    '雨の日はいつも猫と本を読んで寝る',
  ])('but not %s', (password) => {
    expect(isCommonPassword(password, about)).toBe(false)
  })

  test('whoever else it is, the name is no common word', () => {
    expect(isCommonPassword('tindlemoor skellbeck', about)).toBe(true)
    expect(isCommonPassword('tindlemoor skellbeck', ['Bo Other', 'bo@example.org'])).toBe(false)
  })
})
