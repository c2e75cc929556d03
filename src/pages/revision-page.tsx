import { useQuery } from '@tanstack/react-query'
import { useParams, useSearchParams } from 'react-router-dom'
import type { Page } from '#shared/api/pages.ts'
import type { Revision } from '#shared/api/revisions.ts'
import { revisionQuery } from '#src/api/revisions.ts'
import { useViewer } from '#src/api/session.ts'
import { ButtonLink } from '#src/components/button.tsx'
import { Waiting } from '#src/components/pencil-line.tsx'
import { SourceList } from '#src/features/citations/source-list.tsx'
import { RemarkList } from '#src/features/reviews/remark-list.tsx'
import { ModelHead } from '#src/features/revisions/model-head.tsx'
import { ModelSheet } from '#src/features/revisions/model-sheet.tsx'
import { TakeBackButton } from '#src/features/revisions/revision-acts.tsx'
import { StateBand } from '#src/features/revisions/state-band.tsx'
import { Consequence, EquationsAndTables, NewerKind, Verdicts } from './compared-parts.tsx'
import { comparisonOf } from './comparison.ts'
import { PageGate, ReadFault } from './page-gate.tsx'

/** Any revision, read only; with `?with=` compared with an older one. */
export function RevisionPage() {
  const { page: code = '', mark = '' } = useParams()
  const [search] = useSearchParams()
  const other = search.get('with')
  return (
    <PageGate code={code}>
      {(page) => <Loaded key={`${mark}-${other}`} page={page} mark={mark} other={other} />}
    </PageGate>
  )
}

function Loaded({ page, mark, other }: { page: Page; mark: string; other: string | null }) {
  const answer = useQuery(revisionQuery(useViewer(), page.code, mark, other))
  if (answer.isPending) return <Waiting what={`Reading revision ${mark}`} />
  if (answer.isError)
    return <ReadFault error={answer.error} what={`revision ${mark} of ${page.code}`} onAgain={() => answer.refetch()} />
  return <RevisionView page={page} revision={answer.data.revision} other={answer.data.other} />
}

function RevisionView({ page, revision, other }: { page: Page; revision: Revision; other: Revision | null }) {
  const compared = comparisonOf(revision, other)
  return (
    <main className="mx-auto grid w-full grid-cols-1 max-w-[1440px] content-start gap-3 px-6 py-4 max-tablet:px-4">
      <title>{`${page.code} revision ${revision.mark}${other ? ` against ${other.mark}` : ''} · Brinkbook`}</title>
      <ModelHead
        page={page}
        revision={revision}
        title={compared?.now.document.title ?? page.title}
        note={revision.summary}
        current={['record']}
        acts={<Acts page={page} revision={revision} />}
      />
      <StateBand revision={revision} inForce={page.inForce?.mark ?? null} code={page.code} />
      {!compared && <NewerKind />}
      {compared && other && <Consequence page={page} compared={compared} verb={`Revision ${revision.mark}`} />}
      {compared && other && (
        <div className="grid grid-cols-1 items-start gap-4 bench:grid-cols-[minmax(0,30rem)_minmax(0,1fr)]">
          <div className="grid min-w-0 content-start gap-4">
            <EquationsAndTables compared={compared} />
          </div>
          <Verdicts compared={compared} />
        </div>
      )}
      {compared && !other && (
        <>
          <Verdicts compared={compared} />
          <ModelSheet document={compared.now.document} lines={revision.lines} sources={revision.sources} />
        </>
      )}
      <RemarkList remarks={revision.remarks} />
      {revision.sources.length > 0 && (
        <section aria-labelledby="revision-sources" className="sheet p-5">
          <h2 id="revision-sources" className="text-subtitle">
            Sources of this revision
          </h2>
          <SourceList sources={revision.sources} />
        </section>
      )}
      <p className="text-label text-ink-2">
        Core {revision.engine}. Fingerprint <span className="figures wrap-anywhere">{revision.fingerprint}</span>
      </p>
    </main>
  )
}

function Acts({ page, revision }: { page: Page; revision: Revision }) {
  if (revision.state !== 'in-review') return null
  return (
    <>
      {page.may.includes('revision:take-back') && <TakeBackButton code={page.code} revision={revision} />}
      <ButtonLink to={`/reviews/${page.code}/${revision.mark}`} look="first">
        Open the review
      </ButtonLink>
    </>
  )
}
