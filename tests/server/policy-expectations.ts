/*
 * A second opinion on who may do what, written out from spec and issue, not derived from shared/api/roles.ts: where the
 * two differ, the test fails and somebody has to decide. 200 stands for "may"; the other figures are the exact answers.
 */

export type Expected = 200 | 401 | 403 | 404

/** Who asks. `away` writes in another group; `disabled` had a session when the account was disabled. */
export const viewers = [
  'anonymous',
  'disabled',
  'stranger',
  'away',
  'administrator',
  'reader',
  'contributor',
  'maintainer',
] as const
export type ViewerName = (typeof viewers)[number]

/** What stands on a page. */
export const states = [
  'draft',
  'in-review',
  'in-force',
  'in-force-in-review',
  'withdrawn',
  'withdrawn-in-review',
  'removed',
] as const
export type StateName = (typeof states)[number]

export const accesses = ['group', 'signed-in', 'open'] as const
export type AccessName = (typeof accesses)[number]

/** What a viewer is to a page. Visiting: outside the group, but the page's read access reaches them. */
export const relations = [
  'signed out',
  'signed out, visiting',
  'outside',
  'outside, visiting',
  'reader',
  'contributor',
  'maintainer',
] as const
export type Relation = (typeof relations)[number]

export function relationOf(viewer: ViewerName, access: AccessName): Relation {
  switch (viewer) {
    case 'anonymous':
    case 'disabled':
      return access === 'open' ? 'signed out, visiting' : 'signed out'
    case 'stranger':
    case 'away':
    // Being an administrator opens no page.
    case 'administrator':
      return access === 'group' ? 'outside' : 'outside, visiting'
    default:
      return viewer
  }
}

type Row = readonly [Expected, Expected, Expected, Expected, Expected, Expected, Expected]
type Matrix = Record<Relation, Row>

// Columns: draft, in review, in force, in force + review, withdrawn, withdrawn + review, removed.
const readsWhatIsPublic: Matrix = {
  'signed out': [401, 401, 401, 401, 401, 401, 401],
  'signed out, visiting': [401, 401, 200, 200, 200, 200, 401],
  outside: [404, 404, 404, 404, 404, 404, 404],
  'outside, visiting': [404, 404, 200, 200, 200, 200, 404],
  reader: [200, 200, 200, 200, 200, 200, 404],
  contributor: [200, 200, 200, 200, 200, 200, 404],
  maintainer: [200, 200, 200, 200, 200, 200, 404],
}
const readsTheDraft: Matrix = {
  'signed out': [401, 401, 401, 401, 401, 401, 401],
  'signed out, visiting': [401, 401, 401, 401, 401, 401, 401],
  outside: [404, 404, 404, 404, 404, 404, 404],
  'outside, visiting': [404, 404, 403, 403, 403, 403, 404],
  reader: [200, 200, 200, 200, 200, 200, 404],
  contributor: [200, 200, 200, 200, 200, 200, 404],
  maintainer: [200, 200, 200, 200, 200, 200, 404],
}
/** Not while a review is under way. */
const changesTheDraft: Matrix = {
  'signed out': [401, 401, 401, 401, 401, 401, 401],
  'signed out, visiting': [401, 401, 401, 401, 401, 401, 401],
  outside: [404, 404, 404, 404, 404, 404, 404],
  'outside, visiting': [404, 404, 403, 403, 403, 403, 404],
  reader: [403, 403, 403, 403, 403, 403, 404],
  contributor: [200, 403, 200, 403, 200, 403, 404],
  maintainer: [200, 403, 200, 403, 200, 403, 404],
}
/** For maintainers, not while a review is under way. */
const renewsTheDraft: Matrix = {
  'signed out': [401, 401, 401, 401, 401, 401, 401],
  'signed out, visiting': [401, 401, 401, 401, 401, 401, 401],
  outside: [404, 404, 404, 404, 404, 404, 404],
  'outside, visiting': [404, 404, 403, 403, 403, 403, 404],
  reader: [403, 403, 403, 403, 403, 403, 404],
  contributor: [403, 403, 403, 403, 403, 403, 404],
  maintainer: [200, 403, 200, 403, 200, 403, 404],
}
/** Only while a review is under way. Whether the contributor is the sender is for the service to say. */
const takesBack: Matrix = {
  'signed out': [401, 401, 401, 401, 401, 401, 401],
  'signed out, visiting': [401, 401, 401, 401, 401, 401, 401],
  outside: [404, 404, 404, 404, 404, 404, 404],
  'outside, visiting': [404, 404, 403, 403, 403, 403, 404],
  reader: [403, 403, 403, 403, 403, 403, 404],
  contributor: [403, 200, 403, 200, 403, 200, 404],
  maintainer: [403, 200, 403, 200, 403, 200, 404],
}
const decides: Matrix = {
  'signed out': [401, 401, 401, 401, 401, 401, 401],
  'signed out, visiting': [401, 401, 401, 401, 401, 401, 401],
  outside: [404, 404, 404, 404, 404, 404, 404],
  'outside, visiting': [404, 404, 403, 403, 403, 403, 404],
  reader: [403, 403, 403, 403, 403, 403, 404],
  contributor: [403, 403, 403, 403, 403, 403, 404],
  maintainer: [403, 200, 403, 200, 403, 200, 404],
}
const withdraws: Matrix = {
  'signed out': [401, 401, 401, 401, 401, 401, 401],
  'signed out, visiting': [401, 401, 401, 401, 401, 401, 401],
  outside: [404, 404, 404, 404, 404, 404, 404],
  'outside, visiting': [404, 404, 403, 403, 403, 403, 404],
  reader: [403, 403, 403, 403, 403, 403, 404],
  contributor: [403, 403, 403, 403, 403, 403, 404],
  maintainer: [403, 403, 200, 200, 403, 403, 404],
}
const keepsThePage: Matrix = {
  'signed out': [401, 401, 401, 401, 401, 401, 401],
  'signed out, visiting': [401, 401, 401, 401, 401, 401, 401],
  outside: [404, 404, 404, 404, 404, 404, 404],
  'outside, visiting': [404, 404, 403, 403, 403, 403, 404],
  reader: [403, 403, 403, 403, 403, 403, 404],
  contributor: [403, 403, 403, 403, 403, 403, 404],
  maintainer: [200, 200, 200, 200, 200, 200, 404],
}
/** Only what was never sent for review. */
const removes: Matrix = {
  'signed out': [401, 401, 401, 401, 401, 401, 401],
  'signed out, visiting': [401, 401, 401, 401, 401, 401, 401],
  outside: [404, 404, 404, 404, 404, 404, 404],
  'outside, visiting': [404, 404, 403, 403, 403, 403, 404],
  reader: [403, 403, 403, 403, 403, 403, 404],
  contributor: [403, 403, 403, 403, 403, 403, 404],
  maintainer: [200, 403, 403, 403, 403, 403, 404],
}

export interface PageExpectation {
  matrix: Matrix
  /** The act changes one state of a thing, which If-Match has to name. */
  ifMatch?: true
}

export const pageRoutes: Record<string, PageExpectation> = {
  'GET /pages/:code': { matrix: readsWhatIsPublic },
  'PATCH /pages/:code': { matrix: keepsThePage, ifMatch: true },
  'DELETE /pages/:code': { matrix: removes, ifMatch: true },
  'GET /pages/:code/draft': { matrix: readsTheDraft },
  'POST /pages/:code/draft/generations': { matrix: renewsTheDraft },
  'GET /pages/:code/revisions': { matrix: readsWhatIsPublic },
  'GET /pages/:code/revisions/:mark': { matrix: readsWhatIsPublic },
  'POST /pages/:code/revisions': { matrix: changesTheDraft },
  'POST /pages/:code/revisions/:mark/take-back': { matrix: takesBack, ifMatch: true },
  'POST /pages/:code/revisions/:mark/return': { matrix: decides, ifMatch: true },
  'POST /pages/:code/revisions/:mark/approve': { matrix: decides, ifMatch: true },
  'POST /pages/:code/revisions/:mark/withdraw': { matrix: withdraws, ifMatch: true },
  'GET /pages/:code/sources': { matrix: readsTheDraft },
  'POST /pages/:code/sources': { matrix: changesTheDraft },
  'DELETE /pages/:code/sources/:source': { matrix: changesTheDraft },
  'POST /pages/:code/sources/:source/links': { matrix: changesTheDraft },
  'DELETE /pages/:code/source-links/:link': { matrix: changesTheDraft },
}

type ByViewer = Record<ViewerName, Expected>

const everybody: ByViewer = {
  anonymous: 200,
  disabled: 200,
  stranger: 200,
  away: 200,
  administrator: 200,
  reader: 200,
  contributor: 200,
  maintainer: 200,
}
const signedIn: ByViewer = { ...everybody, anonymous: 401, disabled: 401 }
const administrator: ByViewer = {
  anonymous: 401,
  disabled: 401,
  stranger: 403,
  away: 403,
  administrator: 200,
  reader: 403,
  contributor: 403,
  maintainer: 403,
}

export const siteRoutes: Record<string, ByViewer> = {
  'GET /session': everybody,
  'POST /session': everybody,
  'DELETE /session': signedIn,
  'DELETE /session/everywhere': signedIn,
  'PUT /people/me/password': signedIn,
  'GET /setup/:token': everybody,
  'POST /setup/:token': everybody,
  'GET /invitations/:token': everybody,
  'POST /invitations/:token': everybody,
  'GET /password-links/:token': everybody,
  'POST /password-links/:token': everybody,
  'GET /pages': everybody,
  'GET /groups': signedIn,
  'POST /groups': administrator,
  'GET /reviews': signedIn,
  'POST /cards': signedIn,
  'GET /people': administrator,
  'PATCH /people/:person': administrator,
  'POST /people/:person/password-link': administrator,
}

const readsTheGroup: ByViewer = {
  anonymous: 401,
  disabled: 401,
  stranger: 404,
  away: 404,
  administrator: 200,
  reader: 200,
  contributor: 200,
  maintainer: 200,
}
const keepsTheGroup: ByViewer = { ...readsTheGroup, reader: 403, contributor: 403 }
const writesInTheGroup: ByViewer = { ...readsTheGroup, administrator: 403, reader: 403 }

export const groupRoutes: Record<string, ByViewer> = {
  'GET /groups/:group': readsTheGroup,
  'PATCH /groups/:group/members/:person': keepsTheGroup,
  'DELETE /groups/:group/members/:person': keepsTheGroup,
  'POST /groups/:group/invitations': keepsTheGroup,
  'DELETE /groups/:group/invitations/:invitation': keepsTheGroup,
  'POST /groups/:group/pages': writesInTheGroup,
}

/** Routes outside the API: the two for whoever runs the process, and the pages of the client. */
export const otherRoutes = ['/healthz', '/readyz']

/** How a socket is met: let in to write, to watch while a review is under way, to read; or closed with a code. */
export type Met = 'live' | 'locked' | 'read-only' | 4401 | 4403 | 4404
type MetRow = readonly [Met, Met, Met, Met, Met, Met, Met]

// Closed with 4401: nobody is signed in; 4404: no such page for you; 4403: you may read the page, not its draft.
export const sockets: Record<Relation, MetRow> = {
  'signed out': [4401, 4401, 4401, 4401, 4401, 4401, 4401],
  'signed out, visiting': [4401, 4401, 4401, 4401, 4401, 4401, 4401],
  outside: [4404, 4404, 4404, 4404, 4404, 4404, 4404],
  'outside, visiting': [4404, 4404, 4403, 4403, 4403, 4403, 4404],
  reader: ['read-only', 'read-only', 'read-only', 'read-only', 'read-only', 'read-only', 4404],
  contributor: ['live', 'locked', 'live', 'locked', 'live', 'locked', 4404],
  maintainer: ['live', 'locked', 'live', 'locked', 'live', 'locked', 4404],
}

/** Which messages are taken from whom once let in: those that ask and show, and those that change the text. */
export const socketMessages: Record<string, readonly Met[]> = {
  'sync-step-1': ['live', 'locked', 'read-only'],
  awareness: ['live', 'locked', 'read-only'],
  'sync-step-2': ['live'],
  update: ['live'],
}
