import { autocompletion, type CompletionContext, type CompletionResult } from '@codemirror/autocomplete'
import type { Extension } from '@codemirror/state'
import { functionNames } from '#shared/model/expression.ts'

export interface KnownName {
  symbol: string
  detail: string
}

/**
 * Offers declared names and functions from the third letter on, or with Ctrl+Space. Enter takes, Escape closes, Tab
 * never takes. `names` is asked anew each time, so it follows the tables.
 */
export function nameCompletion(names: () => readonly KnownName[]): Extension {
  const complete = (context: CompletionContext): CompletionResult | null => {
    const word = context.matchBefore(/[\p{L}][\p{L}\p{N}_]*/u)
    if (!word || (!context.explicit && word.text.length < 3)) return null
    const line = context.state.doc.lineAt(context.pos)
    if (line.text.slice(0, word.from - line.from).includes('#')) return null
    return {
      from: word.from,
      options: [
        ...names().map(({ symbol, detail }) => ({ label: symbol, detail, type: 'variable', boost: 1 })),
        ...functionNames.map((name) => ({ label: name, apply: `${name}(`, type: 'function' })),
      ],
      validFor: /^[\p{L}][\p{L}\p{N}_]*$/u,
    }
  }
  return autocompletion({ override: [complete], icons: false, activateOnTyping: true, closeOnBlur: true })
}
