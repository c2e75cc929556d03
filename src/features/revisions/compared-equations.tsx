import { Fragment } from 'react'
import type { ShownLine } from '#shared/api/revisions.ts'
import type { ModelDocument } from '#shared/model/document.ts'
import { RevisionCloud } from '#src/components/revision-cloud.tsx'
import { ChangeTriangle } from '#src/components/revision-triangle.tsx'
import { changedLines, compareLines, type LineChange, linesOf } from './compare-lines.ts'
import { Formula } from './equation-lines.tsx'

/** A frozen model as it is compared: its document, and its statements typeset. */
export interface ComparedModel {
  document: ModelDocument
  lines: readonly ShownLine[]
  mark: string
}

function summaryOf(changes: readonly LineChange[], before: ComparedModel | null, after: ComparedModel): string {
  const statements = linesOf(after.document.equations).filter((line) => line.trim() !== '').length
  const of = `${statements} ${statements === 1 ? 'line' : 'lines'}`
  if (before === null) return of
  const count = changedLines(changes)
  return count === 0 ? 'unchanged' : `${count} of ${of} changed`
}

/** The equation block with changed places in a revision cloud, was above now; unchanged lines stay readable. */
export function ComparedEquations({ before, after }: { before: ComparedModel | null; after: ComparedModel }) {
  const changes = compareLines((before ?? after).document.equations, after.document.equations)
  return (
    <section aria-labelledby="compared-equations" className="sheet min-w-0">
      <header className="flex items-baseline justify-between gap-3 px-4 py-3">
        <h2 id="compared-equations" className="text-subtitle">
          Equations
        </h2>
        <span className="text-note text-ink-2">{summaryOf(changes, before, after)}</span>
      </header>
      <div
        role="group"
        aria-label="Equation block"
        tabIndex={0}
        className="grid grid-cols-1 gap-1.5 overflow-x-auto border-t border-rule bg-well px-4 py-3"
      >
        {changes.map((change) =>
          change.kind === 'same' ? (
            <Lines key={`same-${change.at}`} lines={change.lines} from={change.at} typeset={after.lines} />
          ) : (
            <Changed key={`changed-${change.at}`} change={change} before={before} after={after} />
          ),
        )}
      </div>
    </section>
  )
}

function Changed({
  change,
  before,
  after,
}: {
  change: Extract<LineChange, { kind: 'changed' }>
  before: ComparedModel | null
  after: ComparedModel
}) {
  return (
    <div data-change tabIndex={-1} className="relative my-1 min-w-fit">
      <RevisionCloud label={`Changed at line ${change.at}`}>
        <div className="grid grid-cols-[2.5rem_1fr] items-baseline gap-x-2 gap-y-2 pr-6">
          {change.was.length > 0 && (
            <>
              <span className="text-label text-ink-2">was</span>
              <div className="text-ink-2">
                <Lines lines={change.was} from={change.wasAt} typeset={before?.lines ?? []} />
              </div>
            </>
          )}
          <span className="text-label font-[640]">{change.now.length > 0 ? 'now' : 'gone'}</span>
          {change.now.length > 0 && (
            <div className="justify-self-start border-b-2 border-pencil bg-pencil-tint px-1.5 py-1">
              <Lines lines={change.now} from={change.at} typeset={after.lines} />
            </div>
          )}
        </div>
      </RevisionCloud>
      <span className="absolute right-0 bottom-3 bg-well">
        <ChangeTriangle mark={after.mark} label="" />
      </span>
    </div>
  )
}

/** Lines of the block, typeset where the revision has them so, else as typed. Empty ones keep their place. */
function Lines({ lines, from, typeset }: { lines: readonly string[]; from: number; typeset: readonly ShownLine[] }) {
  return (
    <div className="grid gap-1.5">
      {lines.map((text, index) => {
        const line = from + index
        const shown = typeset.find((candidate) => candidate.line === line && candidate.kind !== 'comment')
        return (
          <Fragment key={line}>
            {text.trim() === '' ? (
              <span className="h-2" />
            ) : text.trim().startsWith('#') ? (
              <span className="text-note text-ink-2">{text.replace(/^\s*#\s?/, '')}</span>
            ) : (
              <span className="flex min-h-7 flex-wrap items-baseline gap-x-3">
                <Formula tex={shown?.tex ?? null} text={text} />
                {shown?.comment && <span className="text-note text-ink-2">{shown.comment}</span>}
              </span>
            )}
          </Fragment>
        )
      })}
    </div>
  )
}
