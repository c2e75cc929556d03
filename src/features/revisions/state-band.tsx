import type { ReactNode } from 'react'
import type { RevisionHead } from '#shared/api/pages.ts'
import { StateWord } from '#src/components/signature-strip.tsx'
import { dayOf, momentWithOffset } from '#src/lib/times.ts'

export interface StateBandProps {
  revision: RevisionHead
  /** Mark of what is in force now. */
  inForce: string | null
  code: string
}

/** Across the top of a revision that is not in force: what it is, and what holds instead. */
export function StateBand({ revision, inForce, code }: StateBandProps) {
  if (revision.state === 'in-force') return null
  const other = inForce === revision.mark ? null : inForce
  return (
    <div
      role="note"
      className="flex flex-wrap items-center gap-x-3 gap-y-1 border-y-[1.5px] border-ink bg-sheet px-4 py-2.5"
    >
      <b>
        <StateWord state={revision.state} />
      </b>
      <span>
        {whatItIs(revision)} {other ? `Revision ${other} is in force.` : 'Nothing is in force on this page.'}
      </span>
      {other && (
        <a className="link" href={`/m/${code}`}>
          Open {other}
        </a>
      )}
    </div>
  )
}

function whatItIs({ state, sentAt, settledAt, reason }: RevisionHead): ReactNode {
  const settled = settledAt && <Day at={settledAt} before="on " />
  switch (state) {
    case 'superseded':
      return <>Superseded {settled}.</>
    case 'withdrawn':
      return (
        <>
          Withdrawn {settled}
          {reason ? `: ${reason}${/[.!?]$/.test(reason) ? '' : '.'}` : '.'}
        </>
      )
    case 'in-review':
      return (
        <>
          In review since <Day at={sentAt} />; not to be relied on.
        </>
      )
    default:
      return <>Returned {settled}; not to be relied on.</>
  }
}

/** A day in the viewer's zone; the moment with its offset in the title. */
function Day({ at, before = '' }: { at: string; before?: string }) {
  return (
    <time dateTime={at} title={momentWithOffset(at)}>
      {before}
      {dayOf(at)}
    </time>
  )
}
