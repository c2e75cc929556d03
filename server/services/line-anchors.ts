import * as Y from 'yjs'
import { equationsOf } from '#shared/ydoc/shape.ts'

/** Where each line of a text begins, and how many there are; lines are counted from 1. */
const startsOf = (text: string): number[] => [
  0,
  ...[...text.matchAll(/\r\n|\r|\n/g)].map((end) => end.index + end[0].length),
]

/** The start of a line as a relative position (base64), which follows the line while others type; null where there is no such line. */
export function anchorOfLine(doc: Y.Doc, line: number): string | null {
  const equations = equationsOf(doc)
  const start = startsOf(equations.toString())[line - 1]
  if (start === undefined) return null
  const position = Y.createRelativePositionFromTypeIndex(equations, start)
  return Buffer.from(Y.encodeRelativePosition(position)).toString('base64')
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
