import { CircleAlert } from 'lucide-react'
import type { CardWarning } from '#shared/model/card-document.ts'

/** More than this many are folded away behind their number. */
const inSight = 5

function Warnings({ warnings }: { warnings: readonly CardWarning[] }) {
  return (
    <ul className="mt-1 grid gap-1.5">
      {warnings.map((warning) => (
        <li
          key={`${warning.code} ${warning.line} ${warning.path} ${warning.message}`}
          className="flex items-start gap-2 text-note"
        >
          <CircleAlert size={16} aria-hidden className="mt-0.5 shrink-0 text-ink-3" />
          <span>
            {warning.line !== undefined && <b>Line {warning.line}: </b>}
            {warning.message}
          </span>
        </li>
      ))}
    </ul>
  )
}

/** Units are told last: they change no number. */
const unitCodes: readonly CardWarning['code'][] = ['unit-mismatch', 'bad-unit']

/** What the analysis has to say about its own reach, with the line it speaks of. Never a refusal. */
export function CardWarnings({ warnings, headingId }: { warnings: readonly CardWarning[]; headingId: string }) {
  if (warnings.length === 0) return null
  const sorted = [...warnings].sort(
    (a, b) => Number(unitCodes.includes(a.code)) - Number(unitCodes.includes(b.code)) || 0,
  )
  const rest = sorted.slice(inSight)
  return (
    <section aria-labelledby={headingId}>
      <h3 id={headingId} className="font-[640]">
        Warnings
      </h3>
      <Warnings warnings={sorted.slice(0, inSight)} />
      {rest.length > 0 && (
        <details className="mt-1.5">
          <summary className="cursor-pointer text-note text-ink-2">{rest.length} more</summary>
          <Warnings warnings={rest} />
        </details>
      )}
    </section>
  )
}
