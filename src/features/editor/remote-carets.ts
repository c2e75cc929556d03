import { type Extension, RangeSetBuilder } from '@codemirror/state'
import {
  Decoration,
  type DecorationSet,
  type EditorView,
  ViewPlugin,
  type ViewUpdate,
  WidgetType,
} from '@codemirror/view'
import type { Awareness } from 'y-protocols/awareness'
import * as Y from 'yjs'
import { type RelativePosition, readPresence } from './presence-state.ts'

/**
 * Other people's carets: ink, told apart by their name above the line, never by hue. The package's own plugin colours
 * them through style attributes, which the content security policy refuses.
 */
class CaretWidget extends WidgetType {
  readonly name: string
  constructor(name: string) {
    super()
    this.name = name
  }
  override eq(other: CaretWidget) {
    return other.name === this.name
  }
  toDOM() {
    const caret = document.createElement('span')
    caret.className = 'cm-other-caret'
    // Zero-width: the caret must not move the text.
    caret.append('\u2060')
    const flag = document.createElement('span')
    flag.className = 'cm-other-flag'
    flag.textContent = this.name
    caret.append(flag)
    return caret
  }
  override get estimatedHeight() {
    return -1
  }
  override ignoreEvent() {
    return true
  }
}

function positionOf(doc: Y.Doc, text: Y.Text, json: RelativePosition): number | null {
  try {
    const absolute = Y.createAbsolutePositionFromRelativePosition(Y.createRelativePositionFromJSON(json), doc)
    return absolute && absolute.type === text ? absolute.index : null
  } catch {
    // A position in a text that this document does not have.
    return null
  }
}

export function remoteCarets(text: Y.Text, awareness: Awareness): Extension {
  const plugin = ViewPlugin.fromClass(
    class {
      decorations: DecorationSet = Decoration.none
      private readonly onChange: () => void

      constructor(view: EditorView) {
        // Awareness may change inside an update of the view; the redraw waits for its end.
        this.onChange = () => queueMicrotask(() => view.dispatch({}))
        awareness.on('change', this.onChange)
        this.decorations = this.build(view)
      }

      update(update: ViewUpdate) {
        if (update.selectionSet || update.focusChanged) this.tell(update.view)
        this.decorations = this.build(update.view)
      }

      destroy() {
        awareness.off('change', this.onChange)
        awareness.setLocalStateField('cursor', null)
      }

      private tell(view: EditorView) {
        const { anchor, head } = view.state.selection.main
        const relative = (index: number) =>
          Y.relativePositionToJSON(Y.createRelativePositionFromTypeIndex(text, Math.min(index, text.length)))
        const cursor = view.hasFocus ? { anchor: relative(anchor), head: relative(head) } : null
        const told: unknown = awareness.getLocalState()?.cursor ?? null
        if (JSON.stringify(told) !== JSON.stringify(cursor)) awareness.setLocalStateField('cursor', cursor)
      }

      private build(view: EditorView): DecorationSet {
        const doc = text.doc
        if (!doc) return Decoration.none
        const length = view.state.doc.length
        const carets: { from: number; to: number; head: number; name: string }[] = []
        for (const [client, state] of awareness.getStates()) {
          if (client === doc.clientID) continue
          const { user, cursor } = readPresence(state)
          if (!cursor) continue
          const anchor = positionOf(doc, text, cursor.anchor)
          const head = positionOf(doc, text, cursor.head)
          if (anchor === null || head === null || anchor > length || head > length) continue
          carets.push({
            from: Math.min(anchor, head),
            to: Math.max(anchor, head),
            head,
            name: user?.name ?? 'somebody',
          })
        }
        const ranges = carets.flatMap(({ from, to, head, name }) => [
          ...(from < to ? [{ from, to, value: Decoration.mark({ class: 'cm-other-selection' }) }] : []),
          { from: head, to: head, value: Decoration.widget({ widget: new CaretWidget(name), side: 1 }) },
        ])
        ranges.sort((a, b) => a.from - b.from || a.value.startSide - b.value.startSide)
        const builder = new RangeSetBuilder<Decoration>()
        for (const range of ranges) builder.add(range.from, range.to, range.value)
        return builder.finish()
      }
    },
    { decorations: (value) => value.decorations },
  )
  return plugin
}
