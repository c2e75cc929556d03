import type { ModelError } from './errors.ts'

/** Most faults told at once. */
export const mostErrors = 500

/** Faults of fields first, then by line and column; each place and code once. */
export function sortErrors(errors: readonly ModelError[]): ModelError[] {
  const told = new Set<string>()
  return [...errors]
    .sort((a, b) => (a.line ?? 0) - (b.line ?? 0) || (a.column ?? 0) - (b.column ?? 0))
    .filter((error) => {
      const id = `${error.code} ${error.line ?? ''} ${error.column ?? ''} ${error.path ?? ''} ${error.line === undefined ? error.message : ''}`
      return told.size < mostErrors && !told.has(id) && told.add(id)
    })
}
