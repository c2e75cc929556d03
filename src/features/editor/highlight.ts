import { HighlightStyle, StreamLanguage, syntaxHighlighting } from '@codemirror/language'
import { tags } from '@lezer/highlight'

/**
 * Light on the eye on purpose: names are heavier, comments lighter; no hues, since colour is kept for the verdict.
 * The checker (shared/model) decides what is right; this only reads.
 */
const language = StreamLanguage.define<null>({
  startState: () => null,
  token(stream) {
    if (stream.eatSpace()) return null
    if (stream.match(/^#.*/)) return 'comment'
    if (stream.match(/^d[\p{L}_][\p{L}\p{N}_]*\/dt\b/u)) return 'definition'
    if (stream.match(/^\d+(\.\d*)?([eE][+-]?\d+)?|^\.\d+([eE][+-]?\d+)?/)) return 'number'
    if (stream.match(/^[\p{L}][\p{L}\p{N}_]*/u))
      return stream.string.slice(stream.pos).trimStart().startsWith('(') ? 'function' : 'variable'
    stream.next()
    return 'operator'
  },
  tokenTable: {
    comment: tags.lineComment,
    definition: tags.definition(tags.variableName),
    number: tags.number,
    function: tags.function(tags.variableName),
    variable: tags.variableName,
    operator: tags.operator,
  },
  languageData: { commentTokens: { line: '#' } },
})

const style = HighlightStyle.define([
  { tag: tags.lineComment, class: 'eq-comment' },
  { tag: tags.definition(tags.variableName), class: 'eq-name' },
  { tag: tags.variableName, class: 'eq-name' },
  { tag: tags.function(tags.variableName), class: 'eq-function' },
])

export const equationLanguage = [language, syntaxHighlighting(style)]
