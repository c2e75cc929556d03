import { mayInPage, type PageAct, type PageRole, type PageState } from '#shared/api/roles.ts'
import {
  type CloseCode,
  closeCodes,
  messageAwareness,
  messageSync,
  type RoomState,
  syncStep1,
  syncStep2,
  syncUpdate,
} from '#shared/ydoc/rooms.ts'

/**
 * Every kind of message a browser may send, with the act of the policy table (shared/api/roles.ts) that decides it. What
 * is not in this list is a bad frame; tests/collab/policy.test.ts enumerates list × role × state of the page.
 */
export const messageKinds = [
  { kind: 'sync-step-1', type: messageSync, sync: syncStep1, act: 'draft:read' },
  { kind: 'sync-step-2', type: messageSync, sync: syncStep2, act: 'draft:write' },
  { kind: 'update', type: messageSync, sync: syncUpdate, act: 'draft:write' },
  { kind: 'awareness', type: messageAwareness, sync: null, act: 'draft:presence' },
] as const satisfies readonly { kind: string; type: number; sync: number | null; act: PageAct }[]
export type MessageKind = (typeof messageKinds)[number]['kind']

/** What a person is to a page, as the server looked it up. */
export interface PageAccess {
  role: PageRole
  state: PageState
  generation: number
}

const actOf = new Map<MessageKind, PageAct>(messageKinds.map(({ kind, act }) => [kind, act]))

/** May this kind of message be sent? What has no act is refused. */
export function maySend(kind: MessageKind, access: PageAccess): boolean {
  const act = actOf.get(kind)
  return act !== undefined && mayInPage(act, access.role, access.state)
}

/** Why somebody may not join the room at all, or null. Who may not even read the page is told that there is none. */
export function joinRefusal(access: PageAccess | null): CloseCode | null {
  if (!access) return closeCodes.noSuchRoom
  if (mayInPage('draft:read', access.role, access.state)) return null
  return mayInPage('page:read', access.role, access.state) ? closeCodes.mayNot : closeCodes.noSuchRoom
}

/** What the policy table alone says of a socket's state: a review locks writers, others only ever read. */
export function stateByPolicy(access: PageAccess): Extract<RoomState, 'live' | 'read-only' | 'locked'> {
  if (maySend('update', access)) return 'live'
  return mayInPage('draft:write', access.role, 'draft') ? 'locked' : 'read-only'
}
