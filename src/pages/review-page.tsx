import { useQuery } from '@tanstack/react-query'
import { useNavigate, useParams } from 'react-router-dom'
import type { Page } from '#shared/api/pages.ts'
import type { Revision } from '#shared/api/revisions.ts'
import { compareCards } from '#shared/stability/compare.ts'
import { reviewsQuery } from '#src/api/reviews.ts'
import { revisionQuery } from '#src/api/revisions.ts'
import { useMe, useViewer } from '#src/api/session.ts'
import { ButtonLink } from '#src/components/button.tsx'
import { Waiting } from '#src/components/pencil-line.tsx'
import { SourceList } from '#src/features/citations/source-list.tsx'
import { RemarkList } from '#src/features/reviews/remark-list.tsx'
import { SignBox } from '#src/features/reviews/sign-box.tsx'
import {
  ComparedEquations,
  ComparedTables,
  ComparedVerdicts,
  ConsequenceHead,
} from '#src/features/revisions/compare-view.tsx'
import { parseDocument } from '#src/features/revisions/document-parts.ts'
import { ModelHead } from '#src/features/revisions/model-head.tsx'
import { TakeBackButton } from '#src/features/revisions/revision-acts.tsx'
import { StateBand } from '#src/features/revisions/state-band.tsx'
import { StabilityCardView } from '#src/features/stability-card/stability-card-view.tsx'
import { announce } from '#src/lib/announce.ts'
import { PageGate, ReadFault } from './page-gate.tsx'
import { useRunningPoint } from './use-running-point.ts'

/** One revision under review, against the one in force: consequence, changes, both verdicts, and where it is signed. */
export function ReviewPage() {
  const { page: code = '', mark = '' } = useParams()
  return <PageGate code={code}>{(page) => <Loaded key={mark} page={page} mark={mark} />}</PageGate>
}

function Loaded({ page, mark }: { page: Page; mark: string }) {
  const base = page.inForce && page.inForce.mark !== mark ? page.inForce.mark : null
  const answer = useQuery(revisionQuery(useViewer(), page.code, mark, base))
  if (answer.isPending) return <Waiting what={`Reading revision ${mark}`} />
  if (answer.isError)
    return <ReadFault error={answer.error} what={`revision ${mark} of ${page.code}`} onAgain={() => answer.refetch()} />
  return <Review page={page} revision={answer.data.revision} inForce={answer.data.other} />
}

function Review({ page, revision, inForce }: { page: Page; revision: Revision; inForce: Revision | null }) {
  const me = useMe()
  const navigate = useNavigate()
  const [at, setAt] = useRunningPoint()
  const reviews = useQuery(reviewsQuery(useViewer()))
  const row = [...(reviews.data?.toCheck ?? []), ...(reviews.data?.sentByMe ?? [])].find(
    (candidate) => candidate.code === page.code && candidate.revision.mark === revision.mark,
  )
  const document = parseDocument(revision.document)
  const before = inForce ? parseDocument(inForce.document) : null
  const card = revision.stabilityCard
  const earlier =
    inForce?.stabilityCard && before
      ? { document: before, card: inForce.stabilityCard, label: `revision ${inForce.mark}` }
      : undefined
  const comparison =
    document && card && earlier
      ? compareCards({ document: earlier.document, card: earlier.card }, { document, card })
      : null
  const open = revision.state === 'in-review'
  const mayTakeBack = open && me?.id === revision.sentBy.id && page.may.includes('revision:take-back')
  const whyNot = row ? row.whyNot : 'Only a maintainer who did not write in it can approve.'
  return (
    <main className="mx-auto grid w-full grid-cols-1 max-w-[1440px] content-start gap-4 px-6 py-4 max-tablet:px-4">
      <title>{`Review of ${page.code} ${revision.mark} · Brinkbook`}</title>
      <ModelHead
        page={page}
        revision={revision}
        title={document?.title ?? page.title}
        note={revision.summary}
        current={[]}
        acts={mayTakeBack && <TakeBackButton code={page.code} revision={revision} />}
      />
      {!open && <StateBand revision={revision} inForce={page.inForce?.mark ?? null} code={page.code} />}
      {open && <ConsequenceHead comparison={comparison} verb="Approving this" />}
      {document && (
        <div className="grid grid-cols-1 items-start gap-4 bench:grid-cols-[minmax(0,27rem)_minmax(0,1fr)_20rem]">
          <div className="grid min-w-0 content-start gap-4">
            <ComparedEquations before={before} after={document} />
            <ComparedTables before={before} after={document} />
            <section aria-labelledby="review-sources" className="sheet p-4">
              <h2 id="review-sources" className="text-subtitle">
                Sources
              </h2>
              <SourceList sources={revision.sources} />
            </section>
          </div>
          <div className="grid min-w-0 content-start gap-4">
            {card && (
              <StabilityCardView
                document={document}
                card={card}
                state="stored"
                at={at}
                onAt={setAt}
                earlier={earlier}
              />
            )}
            {comparison && inForce && (
              <section aria-label="Differences of the verdicts" className="sheet">
                <ComparedVerdicts comparison={comparison} was={inForce.mark} now={revision.mark} />
              </section>
            )}
          </div>
          <div className="grid min-w-0 content-start gap-4">
            <RemarkList remarks={revision.remarks} />
            {open && (
              <>
                <p className="sheet p-4 text-note tablet:hidden">
                  Approving needs the equations in full, on a wider screen. Remarks can be written here.
                </p>
                <SignBox
                  code={page.code}
                  revision={revision}
                  whyNot={whyNot}
                  mayReturn={page.may.includes('revision:return')}
                  lines={revision.lines
                    .filter((line) => line.kind !== 'comment')
                    .map((line) => ({ line: line.line, text: line.text }))}
                  symbols={[...document.parameters, ...document.states].map((one) => one.symbol)}
                  onSettled={(what) => {
                    announce(`${what}: revision ${revision.mark} of ${page.code}`)
                    navigate(what === 'Approved' ? `/m/${page.code}` : '/reviews')
                  }}
                />
              </>
            )}
            {!open && <ButtonLink to={`/m/${page.code}`}>Open the page</ButtonLink>}
          </div>
        </div>
      )}
    </main>
  )
}
