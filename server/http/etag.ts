import { AppError } from './app-error.ts'

/** A strong entity tag (RFC 9110 8.8.3): quoted, printable, without quotes inside. */
const strongTag = /^"([\x21\x23-\x7e\x80-\xff]*)"$/

/** The header's form of an opaque tag. */
export const quoteTag = (value: string): string => {
  const quoted = `"${value}"`
  if (!strongTag.test(quoted)) throw new Error('An ETag holds printable characters without quotes.')
  return quoted
}

/**
 * The one tag of an If-Match header. `*`, a list and weak tags are refused: whoever changes something has to have seen
 * exactly one state of it.
 */
export function readIfMatch(header: string | undefined): string {
  const tag = strongTag.exec(header?.trim() ?? '')?.[1]
  if (tag === undefined || tag === '') {
    throw new AppError('needs-if-match', 'This request must say in If-Match which state it changes.')
  }
  return tag
}

/** Whether an If-None-Match header names the tag (weak comparison, RFC 9110 13.1.2). */
export function matchesNone(header: string | undefined, tag: string): boolean {
  if (header === undefined) return false
  if (header.trim() === '*') return true
  return header.split(',').some((part) => part.trim().replace(/^W\//, '') === quoteTag(tag))
}
