/**
 * Who may do what: the one table that decides every route and every message of the co-editing socket. What the table
 * does not name is refused. The tests enumerate it (tests/server/policy.test.ts).
 *
 * Roles come in three scopes. A viewer's role in a page follows from membership and the page's read access:
 * a signed-out person on an open page, or a signed-in one on a page open to all signed-in people, is a `visitor` (reads
 * the revision in force, superseded and withdrawn ones); anybody else outside the group is a `stranger`.
 * `administrator` exists only in the site and group scopes: it reads no page and approves nothing.
 */
export const memberRoles = ['reader', 'contributor', 'maintainer'] as const
export type MemberRole = (typeof memberRoles)[number]

export const siteRoles = ['anonymous', 'person', 'administrator'] as const
export type SiteRole = (typeof siteRoles)[number]

export const groupRoles = ['anonymous', 'outsider', ...memberRoles, 'administrator'] as const
export type GroupRole = (typeof groupRoles)[number]

export const pageRoles = ['stranger', 'visitor', ...memberRoles] as const
export type PageRole = (typeof pageRoles)[number]

/** What stands on a page: what is public (nothing, a revision in force, a withdrawn one) and whether the draft is locked by a review. */
export const pageStates = [
  'draft',
  'in-review',
  'in-force',
  'in-force-in-review',
  'withdrawn',
  'withdrawn-in-review',
  'removed',
] as const
export type PageState = (typeof pageStates)[number]

/** Read access of a page beyond its group. */
export const readAccess = ['group', 'signed-in', 'open'] as const
export type ReadAccess = (typeof readAccess)[number]

const everybody = siteRoles
const signedIn = ['person', 'administrator'] as const
const members = memberRoles
const writers = ['contributor', 'maintainer'] as const
const maintainers = ['maintainer'] as const

export const siteActs = {
  'session:read': everybody,
  'session:begin': everybody,
  'session:end': signedIn,
  'session:end-all': signedIn,
  'password:change': signedIn,
  'link:open': everybody,
  'library:list': everybody,
  'group:list': signedIn,
  'review:list': signedIn,
  'card:compute': signedIn,
  'group:create': ['administrator'],
  'people:list': ['administrator'],
  'people:change': ['administrator'],
  'people:password-link': ['administrator'],
} as const satisfies Record<string, readonly SiteRole[]>

export const groupActs = {
  'group:read': [...members, 'administrator'],
  'member:change': ['maintainer', 'administrator'],
  'member:invite': ['maintainer', 'administrator'],
  'page:create': writers,
} as const satisfies Record<string, readonly GroupRole[]>

type PageRule = Partial<Record<PageState, readonly PageRole[]>>
const standing = ['draft', 'in-review', 'in-force', 'in-force-in-review', 'withdrawn', 'withdrawn-in-review'] as const
const published = ['in-force', 'in-force-in-review', 'withdrawn', 'withdrawn-in-review'] as const
const unlocked = ['draft', 'in-force', 'withdrawn'] as const
const locked = ['in-review', 'in-force-in-review', 'withdrawn-in-review'] as const
const inForce = ['in-force', 'in-force-in-review'] as const

const during = (states: readonly PageState[], roles: readonly PageRole[]): PageRule =>
  Object.fromEntries(states.map((state) => [state, roles]))

const readers = ['visitor', ...members] as const

export const pageActs = {
  /** The page itself: what is public of it, or for members everything. */
  'page:read': { ...during(standing, members), ...during(published, readers) },
  'page:settings': during(standing, maintainers),
  'page:remove': during(['draft'], maintainers),
  'draft:read': during(standing, members),
  'draft:write': during(unlocked, writers),
  /** Begins a new generation with the same content. */
  'draft:renew': during(unlocked, maintainers),
  /** Presence on the socket: carets and names. Readers are seen, they write nothing. */
  'draft:presence': during(standing, members),
  'revision:list': { ...during(standing, members), ...during(published, readers) },
  'revision:read': { ...during(standing, members), ...during(published, readers) },
  'revision:send': during(unlocked, writers),
  'revision:take-back': during(locked, writers),
  'revision:return': during(locked, maintainers),
  'revision:approve': during(locked, maintainers),
  'revision:withdraw': during(inForce, maintainers),
  'source:list': during(standing, members),
  'source:write': during(unlocked, writers),
} as const satisfies Record<string, PageRule>

export type SiteAct = keyof typeof siteActs
export type GroupAct = keyof typeof groupActs
export type PageAct = keyof typeof pageActs
export type Act = SiteAct | GroupAct | PageAct

export function mayInSite(act: SiteAct, role: SiteRole): boolean {
  return (siteActs[act] as readonly SiteRole[] | undefined)?.includes(role) ?? false
}

export function mayInGroup(act: GroupAct, role: GroupRole): boolean {
  return (groupActs[act] as readonly GroupRole[] | undefined)?.includes(role) ?? false
}

export function mayInPage(act: PageAct, role: PageRole, state: PageState): boolean {
  const rule: PageRule | undefined = pageActs[act]
  return rule?.[state]?.includes(role) ?? false
}

/** The viewer's role in a page, from membership, being signed in, and the page's read access. */
export function pageRole(viewer: { signedIn: boolean; member: MemberRole | null }, access: ReadAccess): PageRole {
  if (viewer.member) return viewer.member
  if (access === 'open' || (access === 'signed-in' && viewer.signedIn)) return 'visitor'
  return 'stranger'
}

/** The state of a page, from what is public and whether a revision is under review. */
export function pageState(page: {
  removed: boolean
  inForce: boolean
  everPublic: boolean
  inReview: boolean
}): PageState {
  if (page.removed) return 'removed'
  const base = page.inForce ? 'in-force' : page.everPublic ? 'withdrawn' : null
  if (base === null) return page.inReview ? 'in-review' : 'draft'
  return page.inReview ? `${base}-in-review` : base
}
