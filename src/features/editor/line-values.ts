import { type Extension, RangeSet, StateEffect, StateField } from '@codemirror/state'
import { type EditorView, GutterMarker, gutter } from '@codemirror/view'

/** What stands at the right margin of a line: a helper's value at the running point, or the equation's number. */
export interface LineValue {
  line: number
  text: string
}

export const setLineValues = StateEffect.define<readonly LineValue[]>()

class ValueMarker extends GutterMarker {
  readonly text: string
  constructor(text: string) {
    super()
    this.text = text
  }
  override eq(other: GutterMarker) {
    return other instanceof ValueMarker && other.text === this.text
  }
  override toDOM() {
    return document.createTextNode(this.text)
  }
}

const valuesField = StateField.define<RangeSet<GutterMarker>>({
  create: () => RangeSet.empty,
  update(value, transaction) {
    let next = transaction.docChanged ? value.map(transaction.changes) : value
    for (const effect of transaction.effects) {
      if (!effect.is(setLineValues)) continue
      const doc = transaction.state.doc
      const ranges = effect.value
        .filter(({ line }) => line >= 1 && line <= doc.lines)
        .map(({ line, text }) => new ValueMarker(text).range(doc.line(line).from))
      next = RangeSet.of(ranges, true)
    }
    return next
  },
})

export const lineValues: Extension = [
  valuesField,
  gutter({
    class: 'cm-line-values',
    side: 'after',
    markers: (view: EditorView) => view.state.field(valuesField),
  }),
]
