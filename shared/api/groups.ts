import { z } from 'zod'
import { email, groupSlug, id, isoTime, lineOfText, noContent, none, ofGroup } from './common.ts'
import { endpoint } from './endpoint.ts'
import { handOverLink } from './people.ts'
import { memberRoles } from './roles.ts'

/** 2 to 4 capitals; a prefix belongs to one group for good. */
export const pagePrefix = z.string().regex(/^[A-Z]{2,4}$/, 'Two to four capitals')

export const groupSummary = z.object({
  slug: groupSlug,
  name: z.string(),
  prefixes: z.array(z.string()),
  memberCount: z.number().int(),
  pageCount: z.number().int(),
  role: z.enum(memberRoles).nullable(),
})
export type GroupSummary = z.infer<typeof groupSummary>

export const member = z.object({
  person: z.object({ id, name: z.string(), email: z.string() }),
  role: z.enum(memberRoles),
  since: isoTime,
})
export type Member = z.infer<typeof member>

export const invitation = z.object({
  id,
  email: z.string(),
  name: z.string().nullable(),
  role: z.enum(memberRoles),
  invitedBy: z.string(),
  expiresAt: isoTime,
})
export type Invitation = z.infer<typeof invitation>

/** `invitations` only for those who may invite; else []. */
export const group = groupSummary.extend({
  members: z.array(member),
  invitations: z.array(invitation),
  mayInvite: z.boolean(),
})
export type Group = z.infer<typeof group>

/** Own groups; for an administrator all of them. */
export const listGroups = endpoint({
  method: 'GET',
  path: '/groups',
  act: 'group:list',
  params: none,
  query: none,
  body: none,
  response: z.object({ groups: z.array(groupSummary) }),
})

/** The group gets its first maintainer by invitation; the link is in the answer. */
export const createGroup = endpoint({
  method: 'POST',
  path: '/groups',
  act: 'group:create',
  idempotent: true,
  params: none,
  query: none,
  body: z.strictObject({ name: lineOfText(60), prefixes: z.array(pagePrefix).min(1).max(8), maintainerEmail: email }),
  response: z.object({ group: groupSummary, invitation: handOverLink }),
})

export const readGroup = endpoint({
  method: 'GET',
  path: '/groups/:group',
  act: 'group:read',
  params: ofGroup,
  query: none,
  body: none,
  response: group,
})

const ofMember = z.strictObject({ group: groupSlug, person: z.coerce.number().int().positive() })

/** 409 `last-maintainer` where nobody else would be one. */
export const changeMember = endpoint({
  method: 'PATCH',
  path: '/groups/:group/members/:person',
  act: 'member:change',
  params: ofMember,
  query: none,
  body: z.strictObject({ role: z.enum(memberRoles) }),
  response: group,
})

export const removeMember = endpoint({
  method: 'DELETE',
  path: '/groups/:group/members/:person',
  act: 'member:change',
  params: ofMember,
  query: none,
  body: none,
  response: group,
})

export const invite = endpoint({
  method: 'POST',
  path: '/groups/:group/invitations',
  act: 'member:invite',
  idempotent: true,
  params: ofGroup,
  query: none,
  body: z.strictObject({ email, name: lineOfText(80).optional(), role: z.enum(memberRoles) }),
  response: handOverLink,
})

export const revokeInvitation = endpoint({
  method: 'DELETE',
  path: '/groups/:group/invitations/:invitation',
  act: 'member:invite',
  params: z.strictObject({ group: groupSlug, invitation: z.coerce.number().int().positive() }),
  query: none,
  body: none,
  response: noContent,
})
