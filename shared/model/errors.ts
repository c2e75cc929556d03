/** Every way a model document can be refused. The same codes stand in the editor, on the command line and in the API. */
export const errorCodes = [
  'not-json',
  'wrong-format',
  'unknown-field',
  'missing-field',
  'wrong-type',
  'too-large',
  'empty-model',
  'syntax',
  'bad-character',
  'unknown-symbol',
  'unknown-function',
  'unknown-citation',
  'duplicate-equation',
  'duplicate-symbol',
  'reserved-symbol',
  'assigned-input',
  'missing-equation',
  'missing-state',
  'helper-cycle',
  'time-dependent',
  'bad-range',
  'not-finite',
  'bad-control',
  'bad-observed',
  'too-deep',
  'budget-exceeded',
] as const
export type ErrorCode = (typeof errorCodes)[number]

/**
 * One fault of a model document, in the user's words. `line` is the physical line of the token (from 1), `column` counts
 * UTF-16 units from 1, `path` names the field of the document ("parameters[0].value").
 */
export interface ModelError {
  code: ErrorCode
  message: string
  line?: number
  column?: number
  /** Length of the offending text in UTF-16 units, for the underline in the editor. */
  length?: number
  path?: string
  /** Up to two cures the editor may offer: what to put in the place of the offending text. */
  cures?: { label: string; replacement: string }[]
}
