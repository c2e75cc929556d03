/**
 * Addresses, message types and close codes of the co-editing socket `/collab/:pageId` (the page's numeric id, which is
 * also y-websocket's room name).
 *
 * Message types: 0 sync and 1 awareness are y-protocols' own (sync.js, awareness.js). 100 is ours, server to client:
 * varUint n = how many sync messages of this connection are committed to the database (also those that changed
 * nothing); varUint epoch = which connection. An edit is saved when n reaches the count sent. 101 is ours, server to
 * client: a JSON string { state: 'live' | 'read-only' | 'not-saving' | 'locked' }, told on joining and on change.
 */
export const messageSync = 0
export const messageAwareness = 1
export const messageSaved = 100
export const messageRoomState = 101

/** live: edits are taken. read-only: a reader. locked: a review is under way. not-saving: the database does not answer; typing is held back. full: the size limit is reached. */
export const roomStates = ['live', 'read-only', 'locked', 'not-saving', 'full'] as const
export type RoomState = (typeof roomStates)[number]

/** Close codes. Those from 4400 on mean: do not reconnect by yourself; the text for the user goes with each. */
export const closeCodes = {
  restart: 1012,
  tooBig: 1009,
  badFrame: 1007,
  notSignedIn: 4401,
  mayNot: 4403,
  noSuchRoom: 4404,
  /** Edits arrived that depend on edits the server never saw; reload. */
  orphaned: 4409,
  /** The draft's generation ended (approved, or its shape changed): reload, unsent edits are offered as lines. */
  generationClosed: 4410,
  tooMany: 4429,
  loadFailed: 4500,
} as const
