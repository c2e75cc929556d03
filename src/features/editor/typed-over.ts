import { EditorView } from '@codemirror/view'

/**
 * Text typed over a selection is put in by the editor itself. Left to the browser, it would carry the look of what it
 * deletes over in a style attribute, which the page's policy refuses (and reports as an error).
 */
export const typedOver = EditorView.domEventHandlers({
  beforeinput(event, view) {
    const { state } = view
    if (event.inputType !== 'insertText' || !event.data || event.isComposing || view.composing) return false
    if (state.readOnly || state.selection.ranges.every((range) => range.empty)) return false
    event.preventDefault()
    view.dispatch({ ...state.replaceSelection(event.data), userEvent: 'input.type', scrollIntoView: true })
    return true
  },
})
