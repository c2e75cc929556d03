import { z } from 'zod'
import { id, isoTime, none } from './common.ts'
import { endpoint } from './endpoint.ts'
import { memberRoles } from './roles.ts'

export const person = z.object({
  id,
  name: z.string(),
  email: z.string(),
  administrator: z.boolean(),
  disabled: z.boolean(),
  createdAt: isoTime,
  lastSignIn: isoTime.nullable(),
  groups: z.array(z.object({ slug: z.string(), name: z.string(), role: z.enum(memberRoles) })),
})
export type Person = z.infer<typeof person>

const ofPerson = z.strictObject({ person: z.coerce.number().int().positive() })

export const listPeople = endpoint({
  method: 'GET',
  path: '/people',
  act: 'people:list',
  params: none,
  query: none,
  body: none,
  response: z.object({ people: z.array(person) }),
})

/** Disabling ends every session and socket of the person. The last administrator can neither be disabled nor lose the role. */
export const changePerson = endpoint({
  method: 'PATCH',
  path: '/people/:person',
  act: 'people:change',
  params: ofPerson,
  query: none,
  body: z.strictObject({ administrator: z.boolean().optional(), disabled: z.boolean().optional() }),
  response: person,
})

/** A link to hand over, shown once; good for one use. */
export const handOverLink = z.object({ link: z.string(), expiresAt: isoTime })
export type HandOverLink = z.infer<typeof handOverLink>

export const makePasswordLink = endpoint({
  method: 'POST',
  path: '/people/:person/password-link',
  act: 'people:password-link',
  params: ofPerson,
  query: none,
  body: none,
  response: handOverLink,
})
