import { Link } from 'react-router-dom'
import type { RevisionHead } from '#shared/api/pages.ts'
import { Check } from '#src/components/check.tsx'
import { EdgeStrip } from '#src/components/edge-strip.tsx'
import { OnsetWord } from '#src/components/onset-glyph.tsx'
import { RevisionTriangle } from '#src/components/revision-triangle.tsx'
import { StateWord } from '#src/components/signature-strip.tsx'
import { shortName } from '#src/lib/initials.ts'
import { momentWithOffset, utcDay } from '#src/lib/times.ts'

type Meaning = RevisionHead['signatures'][number]['meaning']

/** Who signed a revision with a meaning, short, each with the moment. */
export function signersOf(revision: RevisionHead, meaning: Meaning): { name: string; at: string }[] {
  return revision.signatures
    .filter((signature) => signature.meaning === meaning)
    .map(({ person, at }) => ({ name: shortName(person.name), at }))
}

export interface RecordRowProps {
  code: string
  revision: RevisionHead
  ticked: boolean
  onTick: (on: boolean) => void
}

/** The tick that takes a revision into the comparison. */
export function CompareTick({ revision, ticked, onTick }: Omit<RecordRowProps, 'code'>) {
  return (
    <Check labelHidden checked={ticked} onChange={(event) => onTick(event.target.checked)}>
      Compare revision {revision.mark}
    </Check>
  )
}

/** The moment a revision stands by: settled, else sent. As signatures are, in UTC. */
export function RevisionDay({ revision }: { revision: RevisionHead }) {
  const at = revision.settledAt ?? revision.sentAt
  return (
    <time dateTime={at} title={momentWithOffset(at)} className="whitespace-nowrap">
      {utcDay(at)}
    </time>
  )
}

/** A revision on a narrow screen: triangle, what changed, who signed, strip, state and day, one under the other. */
export function RecordItem({ code, revision, ticked, onTick }: RecordRowProps) {
  const signed = (['written', 'checked', 'approved'] as const)
    .map((meaning) => ({ meaning, names: signersOf(revision, meaning).map(({ name }) => name) }))
    .filter(({ names }) => names.length > 0)
    .map(({ meaning, names }) => `${meaning} ${names.join(', ')}`)
  return (
    <li className="grid grid-cols-[2.75rem_1fr] gap-x-3 border-b border-rule px-3 py-3 last:border-b-0">
      <div className="grid content-start justify-items-center gap-1">
        <RevisionTriangle mark={revision.mark} size={40} />
        <CompareTick revision={revision} ticked={ticked} onTick={onTick} />
      </div>
      <div className="grid min-w-0 gap-1.5">
        <Link to={`/m/${code}/rev/${revision.mark}`} className="link min-h-6 justify-self-start font-[640]">
          {revision.summary}
        </Link>
        <p className="text-note text-ink-2 first-letter:uppercase">{signed.join('; ')}</p>
        {revision.reason && <p className="text-note">Withdrawn: {revision.reason}</p>}
        {revision.card && (
          <div className="flex flex-wrap items-center justify-between gap-2">
            <EdgeStrip card={revision.card} width={160} faded={revision.state === 'withdrawn'} />
            <OnsetWord kind={revision.card.kind} size={18} />
          </div>
        )}
        <p className="flex flex-wrap justify-between gap-2 text-note">
          <StateWord state={revision.state} />
          <span className="text-ink-2">
            <span className="figures text-label">{revision.mark}</span>, <RevisionDay revision={revision} />
          </span>
        </p>
      </div>
    </li>
  )
}
