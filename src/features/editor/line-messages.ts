import { type Extension, Prec, StateEffect, StateField } from '@codemirror/state'
import { Decoration, type DecorationSet, EditorView, keymap, WidgetType } from '@codemirror/view'

/** A fault of one line, in the user's words, with at most two cures. Columns count UTF-16 units from 1. */
export interface LineMessage {
  line: number
  column?: number
  length?: number
  message: string
  severity: 'fault' | 'warning'
  cures: { label: string; replacement: string }[]
}

export const setLineMessages = StateEffect.define<readonly LineMessage[]>()

class MessageWidget extends WidgetType {
  readonly message: LineMessage
  constructor(message: LineMessage) {
    super()
    this.message = message
  }
  override eq(other: MessageWidget) {
    return JSON.stringify(other.message) === JSON.stringify(this.message)
  }
  toDOM(view: EditorView) {
    const { message, line, severity, cures } = this.message
    const row = document.createElement('div')
    row.className = severity === 'fault' ? 'cm-message cm-message-fault' : 'cm-message'
    row.setAttribute('role', 'note')
    row.tabIndex = -1
    row.dataset.line = String(line)
    // The editor ignores what happens in its widgets, so the row listens itself. A click leaves the caret where it is.
    row.addEventListener('mousedown', (event) => {
      if (!(event.target instanceof HTMLButtonElement)) event.preventDefault()
    })
    row.addEventListener('keydown', (event) => {
      event.stopPropagation()
      if (onMessageKey(event, view)) event.preventDefault()
      else if (event.target === row && event.key.length === 1 && !event.ctrlKey && !event.metaKey) view.focus()
    })
    const words = document.createElement('span')
    words.className = 'cm-message-words'
    words.textContent = `Line ${line}: ${message}`
    row.append(words)
    for (const cure of cures.slice(0, 2)) {
      const button = document.createElement('button')
      button.type = 'button'
      button.className = 'cm-message-cure'
      button.textContent = cure.label
      button.addEventListener('click', () => takeCure(view, this.message, cure.replacement))
      row.append(button)
    }
    return row
  }
  override ignoreEvent() {
    return true
  }
}

/** Start and end of the offending text in the document, or null where the text has moved on since. */
function rangeOf(view: EditorView, message: LineMessage): { from: number; to: number } | null {
  if (message.line > view.state.doc.lines) return null
  const line = view.state.doc.line(message.line)
  const from = Math.min(line.from + (message.column ?? 1) - 1, line.to)
  return { from, to: Math.min(from + (message.length ?? 0), line.to) }
}

function takeCure(view: EditorView, message: LineMessage, replacement: string) {
  const range = rangeOf(view, message)
  if (!range || view.state.readOnly) return
  view.dispatch({
    changes: { ...range, insert: replacement },
    selection: { anchor: range.from + replacement.length },
    userEvent: 'input.cure',
    scrollIntoView: true,
  })
  view.focus()
}

const messagesField = StateField.define<{ messages: readonly LineMessage[]; decorations: DecorationSet }>({
  create: () => ({ messages: [], decorations: Decoration.none }),
  update(value, transaction) {
    let next = transaction.docChanged
      ? { messages: value.messages, decorations: value.decorations.map(transaction.changes) }
      : value
    for (const effect of transaction.effects) {
      if (!effect.is(setLineMessages)) continue
      const doc = transaction.state.doc
      const ranges = effect.value.flatMap((message) => {
        if (message.line < 1 || message.line > doc.lines) return []
        const line = doc.line(message.line)
        const from = Math.min(line.from + (message.column ?? 1) - 1, line.to)
        const to = Math.min(from + (message.length ?? line.length), line.to)
        const underline =
          message.severity === 'fault' && from < to ? [Decoration.mark({ class: 'cm-fault-text' }).range(from, to)] : []
        return [
          ...underline,
          Decoration.widget({ widget: new MessageWidget(message), block: true, side: 1 }).range(line.to),
        ]
      })
      next = { messages: effect.value, decorations: Decoration.set(ranges, true) }
    }
    return next
  },
  provide: (field) => EditorView.decorations.from(field, (value) => value.decorations),
})

/** F8: the caret goes to the next message after it, round to the first. */
function nextMessage(view: EditorView): boolean {
  const { messages } = view.state.field(messagesField)
  if (messages.length === 0) return false
  const sorted = [...messages].sort((a, b) => a.line - b.line || (a.column ?? 0) - (b.column ?? 0))
  const head = view.state.selection.main.head
  const after = sorted.find((message) => (rangeOf(view, message)?.from ?? -1) > head) ?? sorted[0]
  const range = after && rangeOf(view, after)
  if (!after || !range) return false
  view.dispatch({ selection: { anchor: range.from }, scrollIntoView: true })
  const row = view.dom.querySelector<HTMLElement>(`.cm-message[data-line="${after.line}"]`)
  row?.focus()
  return true
}

/** Keys on a focused message: Enter takes the first cure, Escape leaves, F8 goes on. */
function onMessageKey(event: KeyboardEvent, view: EditorView): boolean {
  const row = event.target instanceof Element ? event.target.closest<HTMLElement>('.cm-message') : null
  if (!row) return false
  if (event.key === 'Escape') {
    view.focus()
    return true
  }
  if (event.key === 'F8') return nextMessage(view)
  if (event.key === 'Enter' && event.target === row) {
    row.querySelector('button')?.click()
    view.focus()
    return true
  }
  return false
}

export const lineMessages: Extension = [messagesField, Prec.high(keymap.of([{ key: 'F8', run: nextMessage }]))]
