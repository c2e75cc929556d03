import { CircleAlert } from 'lucide-react'
import type { ModelError } from '#shared/model/errors.ts'
import { LinkButton } from '#src/components/button.tsx'

/** Faults that no line and no row of a table carries: of settings, of the model as a whole. */
export function unplacedFaults(errors: readonly ModelError[]): ModelError[] {
  return errors.filter(({ line, path }) => line === undefined && !/^(parameters|states)\[\d+\]/.test(path ?? ''))
}

/** A place's first part is where it stands on the screen: "secondControl", "parameters" of "parameters". */
export const placeOf = (path: string): string => /^[^.[]+/.exec(path)?.[0] ?? ''

/** Each of these faults, in words that lead to the field it speaks of. */
export function FaultList({ faults, onGo }: { faults: readonly ModelError[]; onGo: (place: string) => void }) {
  if (faults.length === 0) return null
  return (
    <ul aria-label="Faults of the model" className="grid gap-1 border-t border-rule px-4 py-3">
      {faults.map(({ code, message, path }) => (
        <li key={`${path} ${code} ${message}`} className="flex items-center gap-1.5 text-note font-[620] text-fault">
          <CircleAlert aria-hidden className="size-4 shrink-0" />
          {path === undefined ? (
            <span>{message}</span>
          ) : (
            <LinkButton onClick={() => onGo(placeOf(path))}>{message}</LinkButton>
          )}
        </li>
      ))}
    </ul>
  )
}

/** Puts the focus into the field (or the first field of the table, or the equation block) that a place names. */
export function focusPlace(column: Element, place: string): boolean {
  const selector = place === 'equations' ? '.cm-content' : `[data-place="${CSS.escape(place)}"]`
  const found = column.querySelector<HTMLElement>(selector)
  const field = found?.matches('input, select, textarea, .cm-content')
    ? found
    : (found?.querySelector<HTMLElement>('input, select, textarea') ?? found?.querySelector<HTMLElement>('button'))
  field?.focus()
  field?.scrollIntoView({ block: 'center' })
  return field !== null && field !== undefined
}
