import { useSyncExternalStore } from 'react'
import type { UnsavedEdits } from './draft-connection.ts'

/**
 * What somebody typed and the library never took, as lines to copy: kept by person and page until put in or dismissed,
 * over a reload of the draft, a sign-out or a screen that could not stand. It lives in this tab's memory only, so that
 * nobody else who uses the browser reads it.
 */
const kept = new Map<string, string>()
const listeners = new Set<() => void>()
const placeOf = (person: number, page: number) => `${person} ${page}`

/** Lines of the block as they are, cells as comments, so that all of it may be put into the block. */
export const editsAsText = ({ lines, cells }: UnsavedEdits): string =>
  [
    ...lines,
    ...cells.map(({ table, row, cell, value }) => `# ${[table, row, cell].filter(Boolean).join(' ')}: ${value}`),
  ].join('\n')

export function keepEdits(person: number, page: number, edits: UnsavedEdits): void {
  const text = editsAsText(edits)
  if (text === '') return
  const place = placeOf(person, page)
  const before = kept.get(place)
  kept.set(place, before ? `${before}\n${text}` : text)
  tell()
}

export function dismissKept(person: number, page: number): void {
  if (kept.delete(placeOf(person, page))) tell()
}

export const keptEdits = (person: number, page: number): string | null => kept.get(placeOf(person, page)) ?? null

export function useKeptEdits(person: number, page: number): string | null {
  return useSyncExternalStore(
    (listener) => {
      listeners.add(listener)
      return () => listeners.delete(listener)
    },
    () => keptEdits(person, page),
  )
}

function tell(): void {
  for (const listener of [...listeners]) listener()
}
