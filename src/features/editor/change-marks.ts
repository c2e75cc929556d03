import { type Extension, RangeSet, StateEffect, StateField } from '@codemirror/state'
import { type EditorView, GutterMarker, gutter } from '@codemirror/view'
import type { ChangedLine } from './line-changes.ts'

/** Lines that differ from a revision, with its mark (2.1.0); null where there is no revision to differ from. */
export interface ChangeMarks {
  lines: readonly ChangedLine[]
  mark: string
}

export const setChangeMarks = StateEffect.define<ChangeMarks | null>()

/** What a triangle in the margin says. */
export const changeWords = ({ line, kind }: ChangedLine, mark: string): string =>
  kind === 'changed' ? `Line ${line} changed since revision ${mark}` : `Lines removed here since revision ${mark}`

const svg = 'http://www.w3.org/2000/svg'

class ChangeMarker extends GutterMarker {
  readonly words: string
  readonly shown: string
  constructor(words: string, shown: string) {
    super()
    this.words = words
    this.shown = shown
  }
  override eq(other: GutterMarker) {
    return other instanceof ChangeMarker && other.words === this.words
  }
  /** The same triangle as in the margin of the parameter table (components/revision-triangle.tsx). */
  override toDOM() {
    const triangle = document.createElementNS(svg, 'svg')
    const set = (element: Element, attributes: Record<string, string>) => {
      for (const [name, value] of Object.entries(attributes)) element.setAttribute(name, value)
    }
    set(triangle, { viewBox: '0 0 34 30', width: '20', height: '17.6', role: 'img', 'aria-label': this.words })
    const title = document.createElementNS(svg, 'title')
    title.textContent = this.words
    const edge = document.createElementNS(svg, 'path')
    set(edge, { d: 'M17 2 32.2 28.2H1.8z', fill: 'none', stroke: 'currentColor', 'stroke-width': '2' })
    set(edge, { 'stroke-linejoin': 'round' })
    const text = document.createElementNS(svg, 'text')
    set(text, { x: '17', y: '25', 'text-anchor': 'middle', 'font-weight': '640', fill: 'currentColor' })
    set(text, { 'font-size': this.shown.length <= 3 ? '12' : '8.5' })
    text.textContent = this.shown
    triangle.append(title, edge, text)
    return triangle
  }
}

const marksField = StateField.define<RangeSet<GutterMarker>>({
  create: () => RangeSet.empty,
  update(value, transaction) {
    let next = transaction.docChanged ? value.map(transaction.changes) : value
    for (const effect of transaction.effects) {
      if (!effect.is(setChangeMarks)) continue
      const { doc } = transaction.state
      const { lines = [], mark = '' } = effect.value ?? {}
      const shown = mark.split('.').slice(0, 2).join('.')
      const ranges = lines
        .filter(({ line }) => line >= 1 && line <= doc.lines)
        .map((each) => new ChangeMarker(changeWords(each, mark), shown).range(doc.line(each.line).from))
      next = RangeSet.of(ranges, true)
    }
    return next
  },
})

/** Triangles at the left of the lines that differ from the revision in force. */
export const changeMarks: Extension = [
  marksField,
  gutter({ class: 'cm-change-marks', markers: (view: EditorView) => view.state.field(marksField) }),
]
