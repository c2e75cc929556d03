import { useQuery } from '@tanstack/react-query'
import { useRef } from 'react'
import { useNavigate, useParams } from 'react-router-dom'
import type { Page } from '#shared/api/pages.ts'
import type { Revision } from '#shared/api/revisions.ts'
import { revisionQuery } from '#src/api/revisions.ts'
import { useMe, useViewer } from '#src/api/session.ts'
import { ButtonLink } from '#src/components/button.tsx'
import { Waiting } from '#src/components/pencil-line.tsx'
import { SourceList } from '#src/features/citations/source-list.tsx'
import { PhoneFoot } from '#src/features/reviews/phone-foot.tsx'
import { RemarkList } from '#src/features/reviews/remark-list.tsx'
import { SignBox } from '#src/features/reviews/sign-box.tsx'
import { UnsentRemarks } from '#src/features/reviews/unsent-remarks.tsx'
import { useRemarks } from '#src/features/reviews/use-remarks.ts'
import { toRemark, useReviewKeys } from '#src/features/reviews/use-review-keys.ts'
import { ModelHead } from '#src/features/revisions/model-head.tsx'
import { TakeBackButton } from '#src/features/revisions/revision-acts.tsx'
import { StateBand } from '#src/features/revisions/state-band.tsx'
import { announce } from '#src/lib/announce.ts'
import { Consequence, EquationsAndTables, NewerKind, Verdicts } from './compared-parts.tsx'
import { type Comparison, comparisonOf } from './comparison.ts'
import { PageGate, ReadFault } from './page-gate.tsx'

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
  const area = useRef<HTMLElement>(null)
  useReviewKeys(area)
  const compared = comparisonOf(revision, inForce)
  const open = revision.state === 'in-review'
  const mayTakeBack = open && me?.id === revision.sentBy.id && page.may.includes('revision:take-back')
  return (
    <main
      ref={area}
      className="mx-auto grid w-full grid-cols-1 max-w-[1440px] content-start gap-4 px-6 py-4 max-tablet:px-4"
    >
      <title>{`Review of ${page.code} ${revision.mark} · Brinkbook`}</title>
      <ModelHead
        page={page}
        revision={revision}
        title={compared?.now.document.title ?? page.title}
        note={revision.summary}
        current={[]}
        acts={mayTakeBack && <TakeBackButton code={page.code} revision={revision} />}
      />
      {!open && <StateBand revision={revision} inForce={page.inForce?.mark ?? null} code={page.code} />}
      {!compared && <NewerKind />}
      {compared && open && <Consequence page={page} compared={compared} verb="Approving this" />}
      {compared && <Columns page={page} revision={revision} compared={compared} open={open} />}
      {compared && open && (
        <PhoneFoot mayRemark={page.may.includes('revision:return')} onRemark={() => toRemark(area.current)} />
      )}
    </main>
  )
}

function Columns(props: { page: Page; revision: Revision; compared: Comparison; open: boolean }) {
  const { page, revision, compared, open } = props
  return (
    <div className="grid grid-cols-1 items-start gap-4 bench:grid-cols-[minmax(0,21rem)_minmax(0,1fr)_17rem] min-[85rem]:grid-cols-[minmax(0,27rem)_minmax(0,1fr)_20rem]">
      <div className="grid min-w-0 content-start gap-4">
        <EquationsAndTables compared={compared} />
        <section aria-labelledby="review-sources" className="sheet p-4">
          <h2 id="review-sources" className="text-subtitle">
            Sources
          </h2>
          <SourceList sources={revision.sources} />
        </section>
      </div>
      <Verdicts compared={compared} />
      <Settling page={page} revision={revision} compared={compared} open={open} />
    </div>
  )
}

/** Why the viewer cannot approve; null where they can. */
function whyNot(page: Page, revision: Revision, me: number): string | null {
  if (page.may.includes('revision:approve')) return null
  const wrote = revision.signatures.some((one) => one.meaning === 'written' && one.person.id === me)
  return wrote
    ? 'You wrote in it. Somebody else has to check and approve it.'
    : 'Only a maintainer of the group can approve it.'
}

function Settling({ page, revision, compared, open }: Parameters<typeof Columns>[0]) {
  const me = useViewer()
  const navigate = useNavigate()
  const remarks = useRemarks(me, `remarks ${page.code} ${revision.mark}`)
  const { document } = compared.now
  return (
    <div className="grid min-w-0 content-start gap-4">
      <RemarkList remarks={revision.remarks} />
      {open && (
        <SignBox
          code={page.code}
          revision={revision}
          whyNot={whyNot(page, revision, me)}
          mayReturn={page.may.includes('revision:return')}
          remarks={remarks}
          targets={{
            lines: revision.lines.filter((line) => line.kind !== 'comment'),
            symbols: [...document.parameters, ...document.states].map((one) => one.symbol),
          }}
          onSettled={(what) => {
            announce(`${what}: revision ${revision.mark} of ${page.code}`)
            navigate(what === 'Approved' ? `/m/${page.code}` : '/reviews')
          }}
        />
      )}
      {!open && <UnsentRemarks remarks={remarks} />}
      {!open && <ButtonLink to={`/m/${page.code}`}>Open the page</ButtonLink>}
    </div>
  )
}
