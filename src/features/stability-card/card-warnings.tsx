import { CircleAlert } from 'lucide-react'
import type { CardWarning } from '#shared/model/card-document.ts'

/** What the analysis has to say about its own reach, with the line it speaks of. Never a refusal. */
export function CardWarnings({ warnings, headingId }: { warnings: readonly CardWarning[]; headingId: string }) {
  if (warnings.length === 0) return null
  return (
    <section aria-labelledby={headingId}>
      <h3 id={headingId} className="font-[640]">
        What this card does not cover
      </h3>
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
    </section>
  )
}
