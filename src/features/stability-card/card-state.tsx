import { CircleAlert } from 'lucide-react'
import type { ModelError } from '#shared/model/errors.ts'

/** "Line 7 cannot be read." or what else is wrong, from the first fault. */
export function faultHeadline(errors: readonly ModelError[]): string {
  const withLine = errors.find((error) => error.line !== undefined)
  if (withLine) return `Line ${withLine.line} cannot be read.`
  const path = errors[0]?.path ?? ''
  if (path.startsWith('parameters')) return 'The parameter table cannot be read.'
  if (path.startsWith('states')) return 'The state table cannot be read.'
  return 'The model cannot be computed.'
}

/** The fault in its own words, and what still holds. */
export function FaultNote({ errors, keeps }: { errors: readonly ModelError[]; keeps: string | null }) {
  const first = errors.find((error) => error.line !== undefined) ?? errors[0]
  if (!first) return null
  return (
    <div className="rounded-control border-[1.5px] border-fault bg-sheet px-3 py-2">
      <p className="font-[640]">
        {faultHeadline(errors)}
        {keeps && <span className="font-[400]"> The card keeps the last run that worked, {keeps}.</span>}
      </p>
      <p className="mt-1 flex items-start gap-2 text-note text-fault">
        <CircleAlert size={16} aria-hidden className="mt-0.5 shrink-0" />
        <span>
          {first.message}
          {errors.length > 1 && ` ${errors.length - 1} more.`}
        </span>
      </p>
    </div>
  )
}

/** Axes without a verdict: what the card looks like before there is a model to judge. */
export function EmptyDrawing({ words }: { words: string }) {
  return (
    <svg viewBox="0 0 640 260" className="block h-auto w-full max-w-[640px]" role="img" aria-label={words}>
      <path d="M40 20V230H620" fill="none" stroke="var(--color-line)" strokeWidth="1.5" />
      <path d="M40 190H620" stroke="var(--color-line)" strokeWidth="1.5" strokeDasharray="7 5" />
      {[40, 185, 330, 475, 620].map((x) => (
        <path key={x} d={`M${x} 230v6`} stroke="var(--color-line)" strokeWidth="1.2" />
      ))}
      <text x="330" y="110" textAnchor="middle" fontSize="15" fill="var(--color-ink-2)">
        {words}
      </text>
    </svg>
  )
}
