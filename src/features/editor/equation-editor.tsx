import { defaultKeymap, indentWithTab } from '@codemirror/commands'
import { Compartment, EditorState } from '@codemirror/state'
import { drawSelection, EditorView, keymap } from '@codemirror/view'
import './editor.css'
import { useEffect, useRef } from 'react'
import { yCollab, yUndoManagerKeymap } from 'y-codemirror.next'
import type { Awareness } from 'y-protocols/awareness'
import * as Y from 'yjs'
import { cspNonce } from '#src/lib/csp-nonce.ts'
import { type KnownName, nameCompletion } from './completion.ts'
import { equationLanguage } from './highlight.ts'
import { type LineMessage, lineMessages, setLineMessages } from './line-messages.ts'
import { type LineValue, lineValues, setLineValues } from './line-values.ts'
import { remoteCarets } from './remote-carets.ts'
import { typedOver } from './typed-over.ts'

export interface EquationEditorProps {
  text: Y.Text
  awareness: Awareness
  readOnly: boolean
  messages: readonly LineMessage[]
  values: readonly LineValue[]
  names: readonly KnownName[]
  /** Told when the caret moves to another line (from 1). */
  onLine?: (line: number) => void
}

/** The equation block: one shared text, typed by everybody at once. The editor holds no text of its own. */
export function EquationEditor({ text, awareness, readOnly, messages, values, names, onLine }: EquationEditorProps) {
  const host = useRef<HTMLDivElement>(null)
  const view = useRef<EditorView | null>(null)
  const access = useRef(new Compartment())
  // Read when they are needed; a new one must not build the editor anew and lose the caret.
  const latest = useRef({ names, onLine, readOnly })
  latest.current = { names, onLine, readOnly }

  useEffect(() => {
    if (!host.current) return
    const undoManager = new Y.UndoManager(text)
    const nonce = cspNonce()
    let line = 0
    const editor = new EditorView({
      parent: host.current,
      state: EditorState.create({
        doc: text.toString(),
        extensions: [
          nonce ? EditorView.cspNonce.of(nonce) : [],
          keymap.of([...yUndoManagerKeymap, indentWithTab, ...defaultKeymap]),
          drawSelection(),
          EditorView.lineWrapping,
          EditorState.tabSize.of(2),
          typedOver,
          equationLanguage,
          lineMessages,
          lineValues,
          nameCompletion(() => latest.current.names),
          yCollab(text, null, { undoManager }),
          remoteCarets(text, awareness),
          access.current.of(accessOf(latest.current.readOnly)),
          EditorView.contentAttributes.of({
            'aria-label': 'Equation block',
            spellcheck: 'false',
            autocapitalize: 'off',
            autocorrect: 'off',
          }),
          EditorView.updateListener.of((update) => {
            const now = update.state.doc.lineAt(update.state.selection.main.head).number
            if (now !== line) {
              line = now
              latest.current.onLine?.(now)
            }
          }),
        ],
      }),
    })
    view.current = editor
    return () => {
      view.current = null
      editor.destroy()
      undoManager.destroy()
    }
  }, [text, awareness])

  useEffect(() => {
    view.current?.dispatch({ effects: access.current.reconfigure(accessOf(readOnly)) })
  }, [readOnly])
  useEffect(() => {
    view.current?.dispatch({ effects: setLineMessages.of(messages) })
  }, [messages])
  useEffect(() => {
    view.current?.dispatch({ effects: setLineValues.of(values) })
  }, [values])

  return <div ref={host} className="equation-editor" />
}

/** A reader may still put the caret in and copy; nothing can be typed. */
function accessOf(readOnly: boolean) {
  return [EditorState.readOnly.of(readOnly), EditorView.editable.of(!readOnly)]
}
