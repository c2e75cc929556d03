import type { RevisionHead } from '#shared/api/pages.ts'
import { StateWord } from '#src/components/signature-strip.tsx'
import { utcDayOf } from '#src/lib/times.ts'

/** Across the top of a revision that is not in force: what it is, and what holds instead. */
export function StateBand({
  revision,
  inForce,
  code,
}: {
  revision: RevisionHead
  inForce: string | null
  code: string
}) {
  if (revision.state === 'in-force') return null
  const instead =
    inForce && inForce !== revision.mark ? ` Revision ${inForce} is in force.` : ' Nothing is in force on this page.'
  const words = {
    superseded: `Superseded${revision.settledAt ? ` on ${utcDayOf(revision.settledAt)}` : ''}.${instead}`,
    withdrawn: `Withdrawn${revision.settledAt ? ` on ${utcDayOf(revision.settledAt)}` : ''}${revision.reason ? `: ${revision.reason}` : ''}.${inForce ? instead : ' Nothing is in force on this page.'}`,
    'in-review': `In review since ${utcDayOf(revision.sentAt)}; not to be relied on.${inForce ? instead : ''}`,
    returned: `Returned; not to be relied on.${inForce ? instead : ''}`,
  }[revision.state]
  return (
    <div
      role="note"
      className="flex flex-wrap items-center gap-x-3 gap-y-1 border-y-[1.5px] border-ink bg-sheet px-4 py-2.5"
    >
      <b>
        <StateWord state={revision.state} />
      </b>
      <span>{words}</span>
      {inForce && inForce !== revision.mark && (
        <a className="link" href={`/m/${code}`}>
          Open {inForce}
        </a>
      )}
    </div>
  )
}
