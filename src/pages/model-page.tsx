import { useQuery } from '@tanstack/react-query'
import { PencilLine as Pencil } from 'lucide-react'
import { useState } from 'react'
import { Link, Navigate, useParams } from 'react-router-dom'
import type { OnsetKind, Page, RevisionHead } from '#shared/api/pages.ts'
import { revisionQuery } from '#src/api/revisions.ts'
import { useViewer } from '#src/api/session.ts'
import { Button, ButtonLink } from '#src/components/button.tsx'
import { OnsetGlyph } from '#src/components/onset-glyph.tsx'
import { Waiting } from '#src/components/pencil-line.tsx'
import { RevisionTriangle } from '#src/components/revision-triangle.tsx'
import { SourceList } from '#src/features/citations/source-list.tsx'
import { parseDocument } from '#src/features/revisions/document-parts.ts'
import { EquationLines } from '#src/features/revisions/equation-lines.tsx'
import { ModelHead, type PageSection } from '#src/features/revisions/model-head.tsx'
import { citedBy, ModelSheet } from '#src/features/revisions/model-sheet.tsx'
import { WithdrawDialog } from '#src/features/revisions/revision-acts.tsx'
import { StateBand } from '#src/features/revisions/state-band.tsx'
import { StabilityCardView } from '#src/features/stability-card/stability-card-view.tsx'
import { kindHue, kindTurns } from '#src/lib/kind-words.ts'
import { NewerKind } from './compared-parts.tsx'
import { PageAccess } from './page-access.tsx'
import { PageGate, ReadFault } from './page-gate.tsx'
import { RecordSection } from './record-section.tsx'
import { SourcesSection } from './sources-section.tsx'
import { useRunningPoint } from './use-running-point.ts'

const sections: readonly PageSection[] = ['model', 'behaviour', 'sources', 'record']

/** A model page to read: the revision in force, its behaviour first. No editor and no maths parser is loaded here. */
export function ModelPage() {
  const { page: code = '', section = 'behaviour' } = useParams()
  const known = sections.find((candidate) => candidate === section)
  if (!known) return <Navigate to={`/m/${code}`} replace />
  return <PageGate code={code}>{(page) => <ReadView key={page.code} page={page} section={known} />}</PageGate>
}

function ReadView({ page, section }: { page: Page; section: PageSection }) {
  const shown = page.inForce ?? page.lastPublic
  const member = page.may.includes('draft:read')
  // Nothing was ever public: members go to the draft, there is nothing else to see.
  if (!shown && member && (section === 'behaviour' || section === 'model'))
    return <Navigate to={`/m/${page.code}/edit`} replace />
  return (
    <main className="mx-auto grid w-full grid-cols-1 max-w-[1440px] content-start gap-3 px-6 py-4 max-tablet:px-4">
      <title>{`${page.title} · ${page.code} · Brinkbook`}</title>
      <ModelHead
        page={page}
        revision={shown}
        title={page.title}
        note={page.summary}
        current={[section]}
        acts={<ReadActs page={page} shown={shown} />}
      />
      {shown && <StateBand revision={shown} inForce={page.inForce?.mark ?? null} code={page.code} />}
      <DraftNotice page={page} />
      {section === 'record' && <RecordSection page={page} />}
      {section === 'sources' && <SourcesSection page={page} shown={shown} />}
      {(section === 'behaviour' || section === 'model') && shown && (
        <Shown page={page} mark={shown.mark} section={section} />
      )}
    </main>
  )
}

function ReadActs({ page, shown }: { page: Page; shown: RevisionHead | null }) {
  const [withdrawing, setWithdrawing] = useState(false)
  return (
    <>
      <PageAccess page={page} />
      {shown?.state === 'in-force' && page.may.includes('revision:withdraw') && (
        <>
          <Button look="quiet" onClick={() => setWithdrawing(true)}>
            Withdraw
          </Button>
          <WithdrawDialog code={page.code} revision={shown} open={withdrawing} onClose={() => setWithdrawing(false)} />
        </>
      )}
      {page.may.includes('draft:read') && (
        <ButtonLink to={`/m/${page.code}/edit`} look="first" icon={<Pencil aria-hidden className="size-4" />}>
          {page.may.includes('draft:write') ? 'Edit the draft' : 'Open the draft'}
        </ButtonLink>
      )}
    </>
  )
}

/** One line under the title block where something else than what is shown is under way. */
function DraftNotice({ page }: { page: Page }) {
  const inForce = page.inForce?.card?.kind ?? null
  if (page.inReview) {
    const kind = page.inReview.card?.kind ?? null
    return (
      <p className="flex flex-wrap items-center gap-2.5">
        <RevisionTriangle mark={page.inReview.mark} />
        <span>
          Revision {page.inReview.mark} is in review
          {kind && inForce && kind !== inForce ? <Turns before=" and " kind={kind} /> : '.'}
        </span>
        <Link className="link" to={`/reviews/${page.code}/${page.inReview.mark}`}>
          See what changes
        </Link>
      </p>
    )
  }
  const kind = page.draft?.kind ?? null
  if (!page.draft?.differs || kind === null || inForce === null || kind === inForce) return null
  return (
    <p className="flex flex-wrap items-center gap-2.5">
      <OnsetGlyph kind={kind} size={20} />
      <span>
        <Turns before="The draft " kind={kind} />
      </span>
      <Link className="link" to={`/m/${page.code}/edit`}>
        Open the draft
      </Link>
    </p>
  )
}

function Turns({ before, kind }: { before: string; kind: OnsetKind }) {
  const { verb, word } = kindTurns[kind]
  return (
    <>
      {`${before}${verb} this `}
      <b className={kindHue[kind]}>{word}</b>.
    </>
  )
}

function Shown({ page, mark, section }: { page: Page; mark: string; section: 'model' | 'behaviour' }) {
  const viewer = useViewer()
  const answer = useQuery(revisionQuery(viewer, page.code, mark))
  const [at, setAt] = useRunningPoint()
  if (answer.isPending) return <Waiting what={`Reading revision ${mark}`} />
  if (answer.isError)
    return <ReadFault error={answer.error} what={`revision ${mark}`} onAgain={() => answer.refetch()} />
  const { revision } = answer.data
  const document = parseDocument(revision.document)
  if (!document || !revision.stabilityCard) return <NewerKind />
  if (section === 'model') return <ModelSheet document={document} lines={revision.lines} sources={revision.sources} />
  return (
    <div className="grid grid-cols-1 items-start gap-4 bench:grid-cols-[minmax(0,1fr)_320px] min-[85rem]:grid-cols-[minmax(0,1fr)_368px]">
      <StabilityCardView document={document} card={revision.stabilityCard} state="stored" at={at} onAt={setAt} />
      <aside
        className="sheet grid content-start gap-6 p-5 tablet:max-bench:grid-cols-2"
        aria-label="Equations and sources"
      >
        <section aria-labelledby="side-equations">
          <h2 id="side-equations" className="mb-2 border-b border-rule pb-2 font-[640]">
            Equations
          </h2>
          <EquationLines lines={revision.lines} cited={citedBy(revision.sources).lines} />
        </section>
        <section aria-labelledby="side-sources">
          <h2 id="side-sources" className="border-b border-rule pb-2 font-[640]">
            Sources
          </h2>
          <SourceList sources={revision.sources} />
        </section>
      </aside>
    </div>
  )
}
