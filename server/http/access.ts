import type { Database } from '#drizzle/client.ts'
import {
  type GroupContext,
  loadGroupContext,
  loadPageContext,
  type PageContext,
} from '#server/services/page-context.ts'
import type { Viewer } from '#server/services/viewer.ts'
import {
  type Act,
  type GroupAct,
  groupActs,
  mayInGroup,
  mayInPage,
  mayInSite,
  type PageAct,
  pageActs,
  type SiteAct,
  siteActs,
} from '#shared/api/roles.ts'
import { AppError } from './app-error.ts'

export interface Access {
  group: GroupContext | null
  page: PageContext | null
}

const isSiteAct = (act: Act): act is SiteAct => Object.hasOwn(siteActs, act)
const isGroupAct = (act: Act): act is GroupAct => Object.hasOwn(groupActs, act)
const isPageAct = (act: Act): act is PageAct => Object.hasOwn(pageActs, act)

const notSignedIn = () => new AppError('not-signed-in', 'Sign in first.')
const mayNot = () => new AppError('may-not', 'Your role does not allow this here.')
const nothingHere = () => new AppError('not-found', 'There is nothing at this address, or you may not see it.')

function mayAsMember(group: GroupContext, act: GroupAct): boolean {
  return mayInGroup(act, group.role) || (group.administrator && mayInGroup(act, 'administrator'))
}

/**
 * Looks up the group or page that an act is about and asks the policy table. Refusals tell nothing: signed out, 401
 * whether it exists or not; signed in and may not read it, 404 as if it did not exist; may read it but not do this, 403.
 *
 * @param name The group's slug or the page's code; null where it cannot be one.
 * @throws {AppError} for every refusal.
 */
export async function allow(db: Database, viewer: Viewer, act: Act, name: string | null): Promise<Access> {
  if (isSiteAct(act)) {
    if (mayInSite(act, viewer.siteRole)) return { group: null, page: null }
    throw viewer.person ? mayNot() : notSignedIn()
  }
  if (isGroupAct(act)) {
    const group = name === null ? null : await loadGroupContext(db, viewer, name)
    if (group && mayAsMember(group, act)) return { group, page: null }
    if (!viewer.person) throw notSignedIn()
    throw group && mayAsMember(group, 'group:read') ? mayNot() : nothingHere()
  }
  if (isPageAct(act)) {
    const page = name === null ? null : await loadPageContext(db, viewer, { code: name })
    if (page && mayInPage(act, page.role, page.state)) return { group: null, page }
    if (!viewer.person) throw notSignedIn()
    throw page && mayInPage('page:read', page.role, page.state) ? mayNot() : nothingHere()
  }
  throw viewer.person ? mayNot() : notSignedIn()
}
