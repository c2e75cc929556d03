import * as Y from 'yjs'
import { utf8Length } from '#shared/model/utf8.ts'
import {
  equationsOf,
  orderPattern,
  parameterCells,
  parametersOf,
  settingKeys,
  settingsOf,
  stateCells,
  statesOf,
} from '#shared/ydoc/shape.ts'
import type { CollabLimits } from './limits.ts'

/**
 * Judges an update before it touches the document, so that an update either goes in whole or leaves no trace. Yjs itself
 * takes anything it can decode: unknown roots, any content in any place, updates whose dependencies never come (it keeps
 * and forwards them for ever), references across lists that spoil the order. None of that passes here.
 *
 * The walk follows the order in which Yjs integrates: each client's structs by clock, each struct after those it refers to.
 */

/**
 * ok: applying it changes only what the document may hold. orphaned: it depends on edits that are not there.
 * malformed: no update. foreign: a root, key, content or reference that the document does not have. text-full: it would
 * make the equation block too long.
 */
export type Judgement = 'ok' | 'orphaned' | 'malformed' | 'foreign' | 'text-full'

type PlaceName = 'equations' | 'parameters' | 'states' | 'settings' | 'parameter-row' | 'state-row'
/** Where an item stands; `key` is null in the text. 'gone': its surroundings are deleted, Yjs keeps only its length. */
type Place = { name: PlaceName; key: string | null } | 'gone'

const mostClients = 256
const rowIdPattern = /^[A-Za-z0-9_-]+$/
const cellNames = {
  'parameter-row': new Set<string>([...parameterCells, 'order']),
  'state-row': new Set<string>([...stateCells, 'order']),
  settings: new Set<string>(settingKeys),
}

type Decoded = ReturnType<typeof Y.decodeUpdate>
type Struct = Decoded['structs'][number]

/** A struct of the update, and its place once it was its turn. */
interface Entry {
  struct: Struct
  place?: Place
}

/**
 * @param doc       The room's document, its roots prepared, nothing pending.
 * @param textBytes Present length of the equation block in UTF-8 bytes.
 */
export function judgeUpdate(
  doc: Y.Doc,
  update: Uint8Array,
  textBytes: number,
  limits: CollabLimits['document'],
): Judgement {
  let decoded: Decoded
  try {
    decoded = Y.decodeUpdate(update)
  } catch {
    return 'malformed'
  }
  const walk = new UpdateWalk(doc, decoded, limits)
  return walk.judgeStructs() ?? walk.judgeDeletions() ?? walk.judgeText(textBytes) ?? 'ok'
}

class UpdateWalk {
  private readonly doc: Y.Doc
  private readonly limits: CollabLimits['document']
  private readonly deletions: Decoded['ds']
  private readonly entries = new Map<number, Entry[]>()
  /** Next clock of each client, counting what was walked. */
  private readonly reached = new Map<number, number>()
  private readonly inserted: { client: number; clock: number; text: string }[] = []
  private readonly roots: ReadonlyMap<unknown, PlaceName>
  private readonly structs: readonly Struct[]

  constructor(doc: Y.Doc, decoded: Decoded, limits: CollabLimits['document']) {
    this.doc = doc
    this.limits = limits
    this.deletions = decoded.ds
    this.structs = decoded.structs
    this.roots = new Map<unknown, PlaceName>([
      [equationsOf(doc), 'equations'],
      [parametersOf(doc), 'parameters'],
      [statesOf(doc), 'states'],
      [settingsOf(doc), 'settings'],
    ])
  }

  private state(client: number): number {
    return this.reached.get(client) ?? Y.getState(this.doc.store, client)
  }

  judgeStructs(): Judgement | null {
    const fault = this.index()
    if (fault) return fault
    const next = new Map([...this.entries.keys()].map((client) => [client, 0]))
    const waiting = new Map<number, { client: number; clock: number }[]>()
    const turn = [...this.entries.keys()]
    for (let client = turn.pop(); client !== undefined; client = turn.pop()) {
      const list = this.entries.get(client) ?? []
      let i = next.get(client) ?? 0
      for (; i < list.length; i++) {
        const entry = list[i]
        if (!entry) break
        const missing = this.missing(entry.struct)
        if (missing === 'never') return 'orphaned'
        if (missing) {
          waiting.set(missing.client, [...(waiting.get(missing.client) ?? []), { client, clock: missing.clock }])
          break
        }
        const wrong = this.judgeStruct(entry)
        if (wrong) return wrong
      }
      next.set(client, i)
      const blocked = waiting.get(client) ?? []
      const state = this.state(client)
      waiting.set(
        client,
        blocked.filter((other) => other.clock >= state),
      )
      turn.push(...blocked.filter((other) => other.clock < state).map((other) => other.client))
    }
    for (const [client, list] of this.entries) if ((next.get(client) ?? 0) < list.length) return 'orphaned'
    return null
  }

  /** Structs by client. Yjs writes each client once, its clocks without gap or overlap. */
  private index(): Judgement | null {
    let last: Struct | null = null
    for (const struct of this.structs) {
      const { client, clock } = struct.id
      if (last?.id.client === client) {
        if (last.id.clock + last.length !== clock) return 'malformed'
      } else if (this.entries.has(client)) return 'malformed'
      last = struct
      const long = struct.length > this.limits.deletedLength && !(struct instanceof Y.Skip)
      if (struct.length <= 0 || long || !Number.isSafeInteger(clock + struct.length)) return 'malformed'
      const list = this.entries.get(client)
      if (list) list.push({ struct })
      else this.entries.set(client, [{ struct }])
      if (this.entries.size > mostClients) return 'malformed'
    }
    return null
  }

  /** What has to be walked before this struct; 'never' where it cannot come. */
  private missing(struct: Struct): { client: number; clock: number } | 'never' | null {
    if (struct instanceof Y.Skip) return null
    const { client, clock } = struct.id
    if (clock > this.state(client)) return 'never'
    // Also of what is known already: Yjs asks for its references before it sees that.
    if (!(struct instanceof Y.Item)) return null
    const parent: unknown = struct.parent
    for (const id of [struct.origin, struct.rightOrigin, parent instanceof Y.ID ? parent : null]) {
      if (!id) continue
      if (id.client === client ? id.clock >= clock : id.clock >= this.state(id.client)) {
        return id.client !== client && this.entries.has(id.client) ? { client: id.client, clock: id.clock } : 'never'
      }
    }
    return null
  }

  private judgeStruct(entry: Entry): Judgement | null {
    const { struct } = entry
    if (struct instanceof Y.Skip) return null
    const { client, clock } = struct.id
    const known = this.state(client) - clock
    if (known >= struct.length) return null
    this.reached.set(client, clock + struct.length)
    if (!(struct instanceof Y.Item)) {
      entry.place = 'gone'
      return null
    }
    const place = this.placeOf(struct)
    if (!place) return 'foreign'
    entry.place = place
    if (known > 0) {
      // Its first part is here already; the rest is hung behind that part, which therefore must stand in the same list.
      const before = this.placeAt(Y.createID(client, clock + known - 1))
      if (before === 'gone' || !samePlace(before, place)) return 'foreign'
    }
    if (place === 'gone') return null
    if (!this.mayStand(struct.content, place)) return 'foreign'
    if (struct.content instanceof Y.ContentString)
      this.inserted.push({ client, clock: clock + known, text: struct.content.str.slice(known) })
    return null
  }

  private placeOf(item: Y.Item): Place | null {
    const left = item.origin ? this.placeAt(item.origin) : null
    const right = item.rightOrigin ? this.placeAt(item.rightOrigin) : null
    if (left === 'gone' || right === 'gone') return 'gone'
    if (item.origin || item.rightOrigin) {
      const place = left ?? right
      if ((item.origin && !left) || (item.rightOrigin && !right)) return null
      return left && right && !samePlace(left, right) ? null : place
    }
    const parent: unknown = item.parent
    if (typeof parent === 'string') {
      const name = parent === 'equations' || parent === 'parameters' || parent === 'states' || parent === 'settings'
      return name ? { name: parent, key: item.parentSub } : null
    }
    if (!(parent instanceof Y.ID)) return null
    const table = this.placeAt(parent)
    if (table === 'gone') return 'gone'
    const content = this.contentAt(parent)
    if (content instanceof Y.ContentDeleted) return 'gone'
    if (!(content instanceof Y.ContentType)) return null
    if (table?.name === 'parameters') return { name: 'parameter-row', key: item.parentSub }
    return table?.name === 'states' ? { name: 'state-row', key: item.parentSub } : null
  }

  private entryAt(id: Y.ID): Entry | null {
    if (id.clock < Y.getState(this.doc.store, id.client)) return null
    const list = this.entries.get(id.client) ?? []
    let low = 0
    let high = list.length - 1
    while (low <= high) {
      const middle = (low + high) >> 1
      const entry = list[middle]
      if (!entry) return null
      const { clock } = entry.struct.id
      if (id.clock < clock) high = middle - 1
      else if (id.clock >= clock + entry.struct.length) low = middle + 1
      else return entry
    }
    return null
  }

  private placeAt(id: Y.ID): Place | null {
    const entry = this.entryAt(id)
    if (entry) return entry.place ?? null
    const stored: Y.Item | Y.GC = Y.getItem(this.doc.store, id)
    if (!(stored instanceof Y.Item)) return 'gone'
    const root = this.roots.get(stored.parent)
    if (root) return { name: root, key: stored.parentSub }
    const around = stored.parent instanceof Y.AbstractType ? stored.parent._item : null
    const table = around ? this.roots.get(around.parent) : undefined
    if (table === 'parameters') return { name: 'parameter-row', key: stored.parentSub }
    return table === 'states' ? { name: 'state-row', key: stored.parentSub } : null
  }

  private contentAt(id: Y.ID): unknown {
    const struct: Struct | undefined = this.entryAt(id)?.struct ?? Y.getItem(this.doc.store, id)
    return struct instanceof Y.Item ? struct.content : null
  }

  private mayStand(content: unknown, { name, key }: Exclude<Place, 'gone'>): boolean {
    const deleted = content instanceof Y.ContentDeleted
    switch (name) {
      case 'equations':
        return key === null && (deleted || content instanceof Y.ContentString)
      case 'parameters':
      case 'states':
        if (key === null || key.length > this.limits.rowId || !rowIdPattern.test(key)) return false
        return deleted || (content instanceof Y.ContentType && content.type.constructor === Y.Map)
      default: {
        if (key === null || !cellNames[name].has(key)) return false
        if (deleted) return true
        const value: unknown = content instanceof Y.ContentAny && content.arr.length === 1 ? content.arr[0] : null
        if (typeof value !== 'string') return false
        if (key === 'order') return value.length <= this.limits.cell && orderPattern.test(value)
        return value.length <= (name === 'settings' ? this.limits.setting : this.limits.cell)
      }
    }
  }

  judgeDeletions(): Judgement | null {
    const shape = settingsOf(this.doc)._map.get('shape')
    for (const [client, ranges] of this.deletions.clients) {
      let end = 0
      for (const { clock, len } of ranges) {
        // Sorted and apart, as Yjs writes them: otherwise a few kilobytes could make it walk the document many times.
        if (clock < end || len <= 0) return 'malformed'
        end = clock + len
        const hitsShape = shape?.id.client === client && clock <= shape.id.clock && shape.id.clock < end
        if (hitsShape && !shape.deleted) return 'foreign'
      }
      if (end > this.state(client)) return 'orphaned'
    }
    return null
  }

  judgeText(textBytes: number): Judgement | null {
    const added = this.inserted.reduce((sum, { text }) => sum + utf8Length(text), 0)
    if (added === 0 || textBytes + added <= this.limits.text) return null
    return textBytes + added - this.removedBytes() <= this.limits.text ? null : 'text-full'
  }

  /** Bytes of the equation block that the update takes away, its own insertions included. */
  private removedBytes(): number {
    let bytes = 0
    const text = equationsOf(this.doc)
    for (const [client, ranges] of this.deletions.clients) {
      const stored = this.doc.store.clients.get(client) ?? []
      const own = this.inserted.filter((insertion) => insertion.client === client)
      const state = Y.getState(this.doc.store, client)
      let at = 0
      for (const { clock, len } of ranges) {
        const end = clock + len
        for (let i = clock < state ? Y.findIndexSS(stored, clock) : stored.length; i < stored.length; i++) {
          const struct = stored[i]
          if (!struct || struct.id.clock >= end) break
          const counts = struct instanceof Y.Item && !struct.deleted && struct.parent === text
          if (counts && struct.content instanceof Y.ContentString)
            bytes += overlap(struct.content.str, struct.id.clock, clock, end)
        }
        // Both lists are sorted by clock: one walk over the insertions does for all ranges.
        for (; at < own.length; at++) {
          const insertion = own[at]
          if (!insertion || insertion.clock >= end) break
          bytes += overlap(insertion.text, insertion.clock, clock, end)
          if (insertion.clock + insertion.text.length > end) break
        }
      }
    }
    return bytes
  }
}

const overlap = (text: string, clock: number, from: number, to: number): number =>
  utf8Length(text.slice(Math.max(0, from - clock), Math.max(0, to - clock)))

const samePlace = (a: Place | null, b: Place): boolean =>
  a !== null && a !== 'gone' && b !== 'gone' && a.name === b.name && a.key === b.key
