import * as decoding from 'lib0/decoding'
import * as encoding from 'lib0/encoding'
import {
  messageAwareness,
  messageRoomState,
  messageSaved,
  messageSync,
  type RoomNews,
  syncStep1,
  syncStep2,
  syncUpdate,
} from '#shared/ydoc/rooms.ts'
import { type MessageKind, messageKinds } from './policy.ts'

/** Bytes to messages and back. The format stands at the top of connection.ts. */

/** A message from a browser: `payload` is the state vector, the update or the presence states. */
export interface Frame {
  kind: MessageKind
  payload: Uint8Array
}

/** Reads one message. Null for an unknown kind, missing or surplus bytes. */
export function readFrame(bytes: Uint8Array): Frame | null {
  try {
    const decoder = decoding.createDecoder(bytes)
    const type = decoding.readVarUint(decoder)
    const sync = type === messageSync ? decoding.readVarUint(decoder) : null
    const known = messageKinds.find((candidate) => candidate.type === type && candidate.sync === sync)
    if (!known) return null
    const payload = decoding.readVarUint8Array(decoder)
    return decoding.hasContent(decoder) ? null : { kind: known.kind, payload }
  } catch {
    return null
  }
}

function write(...parts: (number | string | Uint8Array)[]): Uint8Array {
  const encoder = encoding.createEncoder()
  for (const part of parts) {
    if (typeof part === 'number') encoding.writeVarUint(encoder, part)
    else if (typeof part === 'string') encoding.writeVarString(encoder, part)
    else encoding.writeVarUint8Array(encoder, part)
  }
  return encoding.toUint8Array(encoder)
}

/** Asks for everything that `stateVector` does not cover. */
export const writeSyncStep1 = (stateVector: Uint8Array) => write(messageSync, syncStep1, stateVector)
/** Answers a sync step 1. */
export const writeSyncStep2 = (update: Uint8Array) => write(messageSync, syncStep2, update)
/** One or more edits of others. */
export const writeUpdate = (update: Uint8Array) => write(messageSync, syncUpdate, update)
/** Message 100: `count` messages with edits of connection `epoch` are committed. */
export const writeSaved = (count: number, epoch: number) => write(messageSaved, count, epoch)
/** Message 101. */
export const writeNews = (news: RoomNews) => write(messageRoomState, JSON.stringify(news))

/** One presence state on the wire; `json` is "null" where the person left. */
export interface PresenceEntry {
  clientId: number
  clock: number
  json: string
}

/** Presence states of an awareness message. Null where they cannot be read. */
export function readPresence(payload: Uint8Array): PresenceEntry[] | null {
  try {
    const decoder = decoding.createDecoder(payload)
    const entries: PresenceEntry[] = []
    for (let count = decoding.readVarUint(decoder); count > 0; count--) {
      const clientId = decoding.readVarUint(decoder)
      const clock = decoding.readVarUint(decoder)
      entries.push({ clientId, clock, json: decoding.readVarString(decoder) })
    }
    return decoding.hasContent(decoder) ? null : entries
  } catch {
    return null
  }
}

/** An awareness message with these states. */
export function writePresence(entries: readonly PresenceEntry[]): Uint8Array {
  const inner = write(entries.length, ...entries.flatMap(({ clientId, clock, json }) => [clientId, clock, json]))
  return write(messageAwareness, inner)
}
