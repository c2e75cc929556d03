import * as Y from 'yjs'
import { equationsOf } from '#shared/ydoc/shape.ts'

/** Where each line of a text begins, and how many there are; lines are counted from 1. */
const startsOf = (text: string): number[] => [
  0,
  ...[...text.matchAll(/\r\n|\r|\n/g)].map((end) => end.index + end[0].length),
]

const anchorAt = (equations: Y.Text, index: number): string =>
  Buffer.from(Y.encodeRelativePosition(Y.createRelativePositionFromTypeIndex(equations, index))).toString('base64')

/** Lines that hold a statement (no blanks, no comments) with their anchors; of a very long block the first ones. */
export function statementLines(doc: Y.Doc, most = 2000): { line: number; text: string; anchor: string }[] {
  const equations = equationsOf(doc)
  const text = equations.toString()
  const starts = startsOf(text)
  return starts
    .map((start, index) => ({ line: index + 1, start, text: text.slice(start, starts[index + 1]).trim() }))
    .filter((each) => each.text !== '' && !each.text.startsWith('#'))
    .slice(0, most)
    .map(({ line, start, text: statement }) => ({ line, text: statement, anchor: anchorAt(equations, start) }))
}

/** The start of a line as a relative position (base64), which follows the line while others type; null where there is no such line. */
export function anchorOfLine(doc: Y.Doc, line: number): string | null {
  const equations = equationsOf(doc)
  const start = startsOf(equations.toString())[line - 1]
  return start === undefined ? null : anchorAt(equations, start)
}

/** The line an anchor stands on now; null where it is no position in the equation block. */
export function lineOfAnchor(doc: Y.Doc, anchor: string): number | null {
  const equations = equationsOf(doc)
  try {
    const position = Y.decodeRelativePosition(new Uint8Array(Buffer.from(anchor, 'base64')))
    const found = Y.createAbsolutePositionFromRelativePosition(position, doc, false)
    if (found?.type !== equations) return null
    return startsOf(equations.toString()).filter((start) => start <= found.index).length
  } catch {
    return null
  }
}
