import { useQuery } from '@tanstack/react-query'
import { useParams, useSearchParams } from 'react-router-dom'
import type { Page } from '#shared/api/pages.ts'
import type { Revision } from '#shared/api/revisions.ts'
import { compareCards } from '#shared/stability/compare.ts'
import { revisionQuery } from '#src/api/revisions.ts'
import { useViewer } from '#src/api/session.ts'
import { ButtonLink } from '#src/components/button.tsx'
import { Waiting } from '#src/components/pencil-line.tsx'
import { SourceList } from '#src/features/citations/source-list.tsx'
import { RemarkList } from '#src/features/reviews/remark-list.tsx'
import {
  ComparedEquations,
  ComparedTables,
  ComparedVerdicts,
  ConsequenceHead,
} from '#src/features/revisions/compare-view.tsx'
import { parseDocument } from '#src/features/revisions/document-parts.ts'
import { ModelHead } from '#src/features/revisions/model-head.tsx'
import { ModelSheet } from '#src/features/revisions/model-sheet.tsx'
import { TakeBackButton } from '#src/features/revisions/revision-acts.tsx'
import { StateBand } from '#src/features/revisions/state-band.tsx'
import { StabilityCardView } from '#src/features/stability-card/stability-card-view.tsx'
import { PageGate, ReadFault } from './page-gate.tsx'
import { useRunningPoint } from './use-running-point.ts'

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
  const [at, setAt] = useRunningPoint()
  const document = parseDocument(revision.document)
  const card = revision.stabilityCard
  const earlierDocument = other ? parseDocument(other.document) : null
  const earlier =
    other?.stabilityCard && earlierDocument
      ? { document: earlierDocument, card: other.stabilityCard, label: `revision ${other.mark}` }
      : undefined
  const comparison =
    document && card && earlier
      ? compareCards({ document: earlier.document, card: earlier.card }, { document, card })
      : null
  const mayTakeBack = revision.state === 'in-review' && page.may.includes('revision:take-back')
  return (
    <main className="mx-auto grid w-full grid-cols-1 max-w-[1440px] content-start gap-3 px-6 py-4 max-tablet:px-4">
      <title>{`${page.code} revision ${revision.mark}${other ? ` against ${other.mark}` : ''} · Brinkbook`}</title>
      <ModelHead
        page={page}
        revision={revision}
        title={document?.title ?? page.title}
        note={revision.summary}
        current={['record']}
        acts={
          <>
            {mayTakeBack && <TakeBackButton code={page.code} revision={revision} />}
            {revision.state === 'in-review' && (
              <ButtonLink to={`/reviews/${page.code}/${revision.mark}`} look="first">
                Open the review
              </ButtonLink>
            )}
          </>
        }
      />
      <StateBand revision={revision} inForce={page.inForce?.mark ?? null} code={page.code} />
      {other && comparison && <ConsequenceHead comparison={comparison} verb={`Revision ${revision.mark}`} />}
      {document && other && comparison && (
        <div className="grid grid-cols-1 items-start gap-4 bench:grid-cols-2">
          <ComparedEquations before={earlierDocument} after={document} />
          <section aria-labelledby="verdict-differences" className="sheet pt-4">
            <h2 id="verdict-differences" className="px-4 text-subtitle">
              What the analysis says
            </h2>
            <ComparedVerdicts comparison={comparison} was={other.mark} now={revision.mark} />
          </section>
          <ComparedTables before={earlierDocument} after={document} />
        </div>
      )}
      {document && card && (
        <StabilityCardView document={document} card={card} state="stored" at={at} onAt={setAt} earlier={earlier} />
      )}
      {document && !other && <ModelSheet document={document} lines={revision.lines} sources={revision.sources} />}
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
