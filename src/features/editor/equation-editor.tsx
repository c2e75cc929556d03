import { defaultKeymap, indentWithTab } from '@codemirror/commands'
import { Compartment, EditorState } from '@codemirror/state'
import { drawSelection, EditorView, keymap } from '@codemirror/view'
import './editor.css'
import { useEffect, useId, useRef } from 'react'
import { yCollab } from 'y-codemirror.next'
import type { Awareness } from 'y-protocols/awareness'
import type * as Y from 'yjs'
import { cspNonce } from '#src/lib/csp-nonce.ts'
import { type ChangeMarks, changeMarks, setChangeMarks } from './change-marks.ts'
import { type KnownName, nameCompletion } from './completion.ts'
import { equationLanguage } from './highlight.ts'
import { linesInWords } from './line-changes.ts'
import { type LineMessage, lineMessages, setLineMessages } from './line-messages.ts'
import { type LineValue, lineValues, setLineValues } from './line-values.ts'
import { remoteCarets } from './remote-carets.ts'
import { typedOver } from './typed-over.ts'

export interface EquationEditorProps {
  text: Y.Text
  awareness: Awareness
  /** Own edits of the whole draft; Ctrl+Z takes the last one back. */
  history: Y.UndoManager
  readOnly: boolean
  messages: readonly LineMessage[]
  values: readonly LineValue[]
  names: readonly KnownName[]
  /** Lines that differ from the revision in force. */
  changed: ChangeMarks | null
  /** Told when the caret moves to another line (from 1). */
  onLine?: (line: number) => void
}

// Ctrl+Enter runs the analysis again, wherever the caret is.
const ownKeys = defaultKeymap.filter(({ key }) => key !== 'Mod-Enter')

/** The equation block: one shared text, typed by everybody at once. The editor holds no text of its own. */
export function EquationEditor(props: EquationEditorProps) {
  const { text, awareness, history, readOnly, messages, values, names, changed, onLine } = props
  const description = useId()
  const host = useRef<HTMLDivElement>(null)
  const view = useRef<EditorView | null>(null)
  const access = useRef(new Compartment())
  // Read when they are needed; a new one must not build the editor anew and lose the caret.
  const latest = useRef({ names, onLine, readOnly })
  latest.current = { names, onLine, readOnly }

  useEffect(() => {
    if (!host.current) return
    const step = (act: 'undo' | 'redo') => () => {
      if (!latest.current.readOnly) history[act]()
      return true
    }
    const nonce = cspNonce()
    let line = 0
    const editor = new EditorView({
      parent: host.current,
      state: EditorState.create({
        doc: text.toString(),
        extensions: [
          nonce ? EditorView.cspNonce.of(nonce) : [],
          keymap.of([
            { key: 'Mod-z', run: step('undo'), preventDefault: true },
            { key: 'Mod-y', run: step('redo'), preventDefault: true },
            { key: 'Mod-Shift-z', run: step('redo'), preventDefault: true },
            indentWithTab,
            ...ownKeys,
          ]),
          drawSelection(),
          EditorView.lineWrapping,
          EditorState.tabSize.of(2),
          typedOver,
          equationLanguage,
          lineMessages,
          lineValues,
          changeMarks,
          nameCompletion(() => latest.current.names),
          yCollab(text, null, { undoManager: history }),
          remoteCarets(text, awareness),
          access.current.of(accessOf(latest.current.readOnly)),
          EditorView.contentAttributes.of({
            'aria-label': 'Equation block',
            'aria-describedby': description,
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
    }
  }, [text, awareness, history, description])

  useEffect(() => {
    view.current?.dispatch({ effects: access.current.reconfigure(accessOf(readOnly)) })
  }, [readOnly])
  useEffect(() => {
    view.current?.dispatch({ effects: setLineMessages.of(messages) })
  }, [messages])
  useEffect(() => {
    view.current?.dispatch({ effects: setLineValues.of(values) })
  }, [values])

  useEffect(() => {
    view.current?.dispatch({ effects: setChangeMarks.of(changed) })
  }, [changed])

  return (
    <>
      <div ref={host} className={changed ? 'equation-editor has-change-marks' : 'equation-editor'} />
      {/* The margin is not part of what a screen reader reads of the block. */}
      <p id={description} className="sr-only">
        {changed && changed.lines.length > 0
          ? `Changed since revision ${changed.mark}: ${linesInWords(changed.lines)}.`
          : ''}
      </p>
    </>
  )
}

/** A reader may still put the caret in and copy; nothing can be typed. */
function accessOf(readOnly: boolean) {
  return [EditorState.readOnly.of(readOnly), EditorView.editable.of(!readOnly)]
}
