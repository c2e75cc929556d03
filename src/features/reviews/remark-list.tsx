import type { Remark } from '#shared/api/revisions.ts'
import { ModelSymbol } from '#src/components/symbol.tsx'
import { dayOf, momentWithOffset } from '#src/lib/times.ts'

/** Remarks of a returned revision, in order, each with what it speaks of. */
export function RemarkList({ remarks }: { remarks: readonly Remark[] }) {
  if (remarks.length === 0) return null
  return (
    <section aria-labelledby="remarks-heading" className="sheet p-4">
      <h2 id="remarks-heading" className="text-subtitle">
        Remarks
      </h2>
      <ol className="mt-2 grid gap-3">
        {remarks.map((remark, index) => (
          <li
            key={`${remark.at}-${remark.text}`}
            className="grid grid-cols-[2rem_1fr] gap-x-2 border-t border-rule pt-3 first:border-t-0"
          >
            <span
              aria-hidden
              className="grid size-6 place-items-center rounded-round border-[1.5px] border-ink text-label font-[640]"
            >
              {index + 1}
            </span>
            <div>
              <p className="text-note">
                <b>{remark.author.name}</b>{' '}
                <span className="text-ink-2">
                  {remark.line !== null && `on line ${remark.line}, `}
                  {remark.symbol !== null && (
                    <>
                      on <ModelSymbol name={remark.symbol} />,{' '}
                    </>
                  )}
                  <time dateTime={remark.at} title={momentWithOffset(remark.at)}>
                    {dayOf(remark.at)}
                  </time>
                </span>
              </p>
              <p className="whitespace-pre-wrap">{remark.text}</p>
            </div>
          </li>
        ))}
      </ol>
    </section>
  )
}
