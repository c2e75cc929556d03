import { z } from 'zod'

/**
 * Addresses, message types and close codes of the co-editing socket `/collab/:pageId?generation=G` (the page's numeric
 * id, which is also y-websocket's room name; G is left out until the server has told it). The wire format stands at the
 * top of collab/connection.ts.
 *
 * Message types: 0 sync and 1 awareness are y-protocols' own (sync.js, awareness.js). 100 is ours, server to client:
 * varUint n = how many messages with edits (sync step 2 and update) of this connection are committed to the database,
 * also those that changed nothing; varUint epoch = which connection. An edit is saved when n reaches the count sent.
 * 101 is ours, server to client: a JSON string (roomNews below), told on joining, before any content, and on change.
 */
export const messageSync = 0
export const messageAwareness = 1
export const messageSaved = 100
export const messageRoomState = 101

/** Kinds of a sync message (y-protocols). */
export const syncStep1 = 0
export const syncStep2 = 1
export const syncUpdate = 2

/** Where the socket lives. */
export const collabPath = '/collab'

/**
 * live: edits are taken. read-only: a reader. locked: a review is under way. not-saving: the database does not answer;
 * typing is held back. full: the equation block's size limit is reached; what is over it is not taken, taking text away
 * helps. no-room: the document with all its steps has reached its limit; nothing is taken, deletions neither (they are
 * steps too), until a new generation begins.
 */
export const roomStates = ['live', 'read-only', 'locked', 'not-saving', 'full', 'no-room'] as const
export type RoomState = (typeof roomStates)[number]

/** What message 101 says: may this socket edit, and which generation of the draft it is joined to. */
export const roomNews = z.object({ state: z.enum(roomStates), generation: z.number().int().positive() })
export type RoomNews = z.infer<typeof roomNews>

/** What the server writes into every presence state as `user`; nothing a client says of itself is believed. */
export const presenceUser = z.object({
  id: z.number().int().positive(),
  name: z.string(),
  role: z.enum(['reader', 'contributor', 'maintainer']),
})
export type PresenceUser = z.infer<typeof presenceUser>

/**
 * Close codes. After 1007, 1009 and 4400 to 4499 the client does not reconnect by itself: the same would happen again.
 * After any other (4500 included) it tries again, later and later.
 */
export const closeCodes = {
  restart: 1012,
  tooBig: 1009,
  badFrame: 1007,
  notSignedIn: 4401,
  mayNot: 4403,
  noSuchRoom: 4404,
  /** Edits arrived that depend on edits the server never saw; reload. */
  orphaned: 4409,
  /** The draft's generation ended (approved, begun anew, or its shape changed): reload, unsent edits are offered as lines. */
  generationClosed: 4410,
  tooMany: 4429,
  loadFailed: 4500,
} as const
export type CloseCode = (typeof closeCodes)[keyof typeof closeCodes]

/** What goes with a close code as its reason, in the user's words (at most 123 bytes). */
export const closeReasons: Readonly<Record<CloseCode, string>> = {
  [closeCodes.restart]: 'The library restarts. Your edits are kept here and sent again.',
  [closeCodes.tooBig]: 'That change was too large to send at once.',
  [closeCodes.badFrame]: 'The library could not read what this tab sent. Reload the page.',
  [closeCodes.notSignedIn]: 'You were signed out. Sign in again and go on.',
  [closeCodes.mayNot]: 'You may not edit this draft.',
  [closeCodes.noSuchRoom]: 'There is no such page, or you may not see it.',
  [closeCodes.orphaned]: 'This tab and the library no longer fit together. Reload the page.',
  [closeCodes.generationClosed]: 'A new draft has begun since. Reload the page; your unsaved lines are kept.',
  [closeCodes.tooMany]: 'This page is open too often, or sent too much at once. Close other tabs and reload.',
  [closeCodes.loadFailed]: 'The draft could not be read just now. Nothing is lost or written over.',
}

/** True where connecting again by itself would only end the same way. */
export const isFinalClose = (code: number): boolean =>
  code === closeCodes.badFrame || code === closeCodes.tooBig || (code >= 4400 && code < 4500)
