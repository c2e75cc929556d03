import { z } from 'zod'
import { email, givenPassword, id, lineOfText, newPassword, noContent, none, ofToken } from './common.ts'
import { endpoint } from './endpoint.ts'
import { memberRoles } from './roles.ts'

/** The signed-in person as their own browser sees them. */
export const me = z.object({
  id,
  name: z.string(),
  email: z.string(),
  administrator: z.boolean(),
  groups: z.array(
    z.object({ slug: z.string(), name: z.string(), role: z.enum(memberRoles), prefixes: z.array(z.string()) }),
  ),
  toReview: z.number().int().nonnegative(),
})
export type Me = z.infer<typeof me>

/** `demonstration`: accounts to try the product with; null where the demonstration library was not loaded. */
export const sessionState = z.object({
  me: me.nullable(),
  demonstration: z
    .object({
      password: z.string(),
      people: z.array(z.object({ name: z.string(), email: z.string(), role: z.string() })),
    })
    .nullable(),
})
export type SessionState = z.infer<typeof sessionState>

export const readSession = endpoint({
  method: 'GET',
  path: '/session',
  act: 'session:read',
  params: none,
  query: none,
  body: none,
  response: sessionState,
})

export const signIn = endpoint({
  method: 'POST',
  path: '/session',
  act: 'session:begin',
  status: 200,
  params: none,
  query: none,
  body: z.strictObject({ email, password: givenPassword }),
  response: sessionState,
})

export const signOut = endpoint({
  method: 'DELETE',
  path: '/session',
  act: 'session:end',
  params: none,
  query: none,
  body: none,
  response: noContent,
})

export const signOutEverywhere = endpoint({
  method: 'DELETE',
  path: '/session/everywhere',
  act: 'session:end-all',
  params: none,
  query: none,
  body: none,
  response: noContent,
})

/** Also ends every other session of the person. */
export const changePassword = endpoint({
  method: 'PUT',
  path: '/people/me/password',
  act: 'password:change',
  params: none,
  query: none,
  body: z.strictObject({ current: givenPassword, next: newPassword }),
  response: noContent,
})

/** What a one-time link is for. An unknown, used or expired one answers 410 `link-used`. */
export const oneTimeLink = z.object({
  kind: z.enum(['setup', 'invitation', 'password']),
  /** Whom it is for, where that is known. */
  name: z.string().nullable(),
  email: z.string().nullable(),
  group: z.string().nullable(),
  role: z.enum(memberRoles).nullable(),
  /** True where the invited address already has an account: it is accepted by signing in. */
  hasAccount: z.boolean(),
  expiresAt: z.iso.datetime(),
})
export type OneTimeLink = z.infer<typeof oneTimeLink>

export const readSetup = endpoint({
  method: 'GET',
  path: '/setup/:token',
  act: 'link:open',
  params: ofToken,
  query: none,
  body: none,
  response: oneTimeLink,
})
/** Makes the first administrator and signs them in. */
export const finishSetup = endpoint({
  method: 'POST',
  path: '/setup/:token',
  act: 'link:open',
  params: ofToken,
  query: none,
  body: z.strictObject({ name: lineOfText(80), email, password: newPassword }),
  response: sessionState,
})

export const readInvitation = endpoint({
  method: 'GET',
  path: '/invitations/:token',
  act: 'link:open',
  params: ofToken,
  query: none,
  body: none,
  response: oneTimeLink,
})
/** Makes the account where there is none (name and password needed), joins the group and signs in. With an account, `password` is that account's. */
export const acceptInvitation = endpoint({
  method: 'POST',
  path: '/invitations/:token',
  act: 'link:open',
  params: ofToken,
  query: none,
  body: z.strictObject({ name: lineOfText(80).optional(), password: z.string().min(1).max(128) }),
  response: sessionState,
})

export const readPasswordLink = endpoint({
  method: 'GET',
  path: '/password-links/:token',
  act: 'link:open',
  params: ofToken,
  query: none,
  body: none,
  response: oneTimeLink,
})
export const finishPasswordLink = endpoint({
  method: 'POST',
  path: '/password-links/:token',
  act: 'link:open',
  params: ofToken,
  query: none,
  body: z.strictObject({ password: newPassword }),
  response: sessionState,
})
