import { canonicalJson } from '#shared/model/canonical-json.ts'
import type { ModelDocument } from '#shared/model/document.ts'
import { ChangeTriangle } from '#src/components/revision-triangle.tsx'
import { ModelSymbol } from '#src/components/symbol.tsx'
import { type Change, compareLeftOut, compareParameters, compareSettings, compareStates } from './compare-documents.ts'
import { compareLineCitations, compareSources } from './compare-sources.ts'

/** Everything beside the equations that differs: an approver signs for all of it. */
export function ComparedTables({
  before,
  after,
  mark,
}: {
  before: ModelDocument | null
  after: ModelDocument
  mark: string
}) {
  const groups: { title: string; changes: Change[]; symbols?: boolean }[] = [
    { title: 'Parameters', changes: compareParameters(before, after), symbols: true },
    { title: 'States', changes: compareStates(before, after), symbols: true },
    { title: 'Settings', changes: compareSettings(before, after) },
    { title: 'Left out', changes: compareLeftOut(before, after) },
    { title: 'Sources of lines', changes: compareLineCitations(before, after) },
    { title: 'Sources', changes: compareSources(before, after) },
  ].filter(({ changes }) => changes.length > 0)
  return (
    <section aria-labelledby="compared-tables" className="sheet min-w-0 py-3">
      <h2 id="compared-tables" className="px-4 text-subtitle">
        Parameters, settings and sources
      </h2>
      {groups.length === 0 && (
        <p className="mt-1 px-4 text-note text-ink-2">
          {before && !sameButEquations(before, after) ? 'Only the order of rows changed.' : 'Unchanged.'}
        </p>
      )}
      {groups.map(({ title, changes, symbols = false }) => (
        <div key={title} className="mt-3">
          <h3 className="flex items-baseline justify-between border-b border-rule px-4 pb-1.5 font-[640]">
            {title}
            <span className="text-note font-[400] text-ink-2">{countText(changes)}</span>
          </h3>
          <ul>
            {changes.map((change) => (
              <li
                key={`${change.subject} ${change.what} ${change.was} ${change.now}`}
                data-change
                tabIndex={-1}
                className="grid grid-cols-[22px_1fr] items-start gap-x-2.5 border-b border-rule px-4 py-2 last:border-b-0"
              >
                <span className="pt-0.5">
                  <ChangeTriangle mark={mark} label="" />
                </span>
                <ChangeText change={change} symbol={symbols} />
              </li>
            ))}
          </ul>
        </div>
      ))}
    </section>
  )
}

function sameButEquations(before: ModelDocument, after: ModelDocument): boolean {
  return canonicalJson({ ...before, equations: '' }) === canonicalJson({ ...after, equations: '' })
}

function countText(changes: readonly Change[]): string {
  const added = changes.filter((change) => change.was === null && change.what !== '').length
  return added === changes.length && added > 0 ? `${added} added` : `${changes.length} changed`
}

function ChangeText({ change, symbol }: { change: Change; symbol: boolean }) {
  const { subject, meaning, what, was, now } = change
  const described = what !== 'meaning' && meaning !== ''
  return (
    <div className="min-w-0">
      {(subject !== '' || what !== '') && (
        <p className="text-note">
          {symbol ? <ModelSymbol name={subject} /> : <b className="font-[640]">{subject}</b>}{' '}
          <span className="text-ink-2">{[described ? meaning : '', what].filter(Boolean).join(', ')}</span>
        </p>
      )}
      <dl className="mt-0.5 grid grid-cols-[2.5rem_1fr] gap-x-2 text-note">
        {was !== null && (
          <>
            <dt className="text-label leading-5 text-ink-2">{now === null ? 'gone' : 'was'}</dt>
            <dd className="wrap-anywhere whitespace-pre-wrap text-ink-2">{was}</dd>
          </>
        )}
        {now !== null && (
          <>
            <dt className="text-label leading-5 font-[640]">{was === null ? 'new' : 'now'}</dt>
            <dd className="wrap-anywhere whitespace-pre-wrap">
              <span className="bg-pencil-tint px-1 font-[620]">{now}</span>
            </dd>
          </>
        )}
      </dl>
    </div>
  )
}
