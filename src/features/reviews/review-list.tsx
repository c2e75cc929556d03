import { Link } from 'react-router-dom'
import type { ReviewRow } from '#shared/api/reviews.ts'
import { OnsetWord } from '#src/components/onset-glyph.tsx'
import { StateWord } from '#src/components/signature-strip.tsx'
import { dayOf, momentWithOffset } from '#src/lib/times.ts'
import { consequenceOf } from './consequence.ts'

/** Revisions under review or settled, one a row; the row's link opens the review. */
export function ReviewList({ title, rows, empty }: { title: string; rows: readonly ReviewRow[]; empty: string }) {
  const heading = `reviews-${title.toLowerCase().replaceAll(' ', '-')}`
  return (
    <section aria-labelledby={heading} className="sheet">
      <h2 id={heading} className="flex items-baseline gap-2 border-b-[1.5px] border-ink px-4 py-3 text-subtitle">
        {title} <span className="text-note font-[400] text-ink-2">{rows.length}</span>
      </h2>
      {rows.length === 0 && <p className="px-4 py-4 text-ink-2">{empty}</p>}
      <ul>
        {rows.map((row) => (
          <li
            key={`${row.code}-${row.revision.mark}`}
            className="grid items-center gap-x-4 gap-y-1 border-b border-rule px-4 py-3 last:border-b-0 tablet:grid-cols-[1fr_12rem_9rem]"
          >
            <div className="min-w-0">
              <Link to={`/reviews/${row.code}/${row.revision.mark}`} className="link inline-block min-h-6 font-[640]">
                {row.title}
              </Link>
              <p className="text-note text-ink-2">
                <span className="figures mr-2 text-label text-ink">{row.code}</span>
                {row.group.name}, revision <span className="figures text-label">{row.revision.mark}</span>, sent by{' '}
                {row.revision.sentBy.name},{' '}
                <time dateTime={row.revision.sentAt} title={momentWithOffset(row.revision.sentAt)}>
                  {dayOf(row.revision.sentAt)}
                </time>
              </p>
              <p className="text-note">{row.revision.summary}</p>
            </div>
            <div>
              {row.revision.card && <OnsetWord kind={row.revision.card.kind} size={18} />}
              {row.revision.state === 'in-review' && <p className="text-note font-[560]">{consequenceOf(row)}</p>}
            </div>
            <StateWord state={row.revision.state} />
          </li>
        ))}
      </ul>
    </section>
  )
}
