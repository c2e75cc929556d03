import { useQuery } from '@tanstack/react-query'
import { useState } from 'react'
import type { DraftTargets } from '#shared/api/drafts.ts'
import type { Page, RevisionHead } from '#shared/api/pages.ts'
import { draftQuery } from '#src/api/drafts.ts'
import { revisionQuery } from '#src/api/revisions.ts'
import { useViewer } from '#src/api/session.ts'
import { sourcesQuery, useRemoveSource, useUnlinkSource } from '#src/api/sources.ts'
import { FaultText } from '#src/components/field.tsx'
import { Waiting } from '#src/components/pencil-line.tsx'
import { AddSource } from '#src/features/citations/add-source.tsx'
import { LinkSource } from '#src/features/citations/link-source.tsx'
import { SourceList } from '#src/features/citations/source-list.tsx'
import { announce } from '#src/lib/announce.ts'
import { ReadFault } from './page-gate.tsx'

/** The draft's sources for members; for everybody else those frozen with the revision shown. */
export function SourcesSection({ page, shown }: { page: Page; shown: RevisionHead | null }) {
  if (page.may.includes('source:list')) return <DraftSources page={page} />
  return shown ? <FrozenSources page={page} mark={shown.mark} /> : null
}

function FrozenSources({ page, mark }: { page: Page; mark: string }) {
  const answer = useQuery(revisionQuery(useViewer(), page.code, mark))
  if (answer.isPending) return <Waiting what="Reading the sources" />
  if (answer.isError)
    return <ReadFault error={answer.error} what={`revision ${mark}`} onAgain={() => answer.refetch()} />
  return (
    <section aria-labelledby="sources-heading" className="sheet p-5">
      <h2 id="sources-heading" className="text-subtitle">
        Sources of revision {mark}
      </h2>
      <SourceList sources={answer.data.revision.sources} />
    </section>
  )
}

const noTargets: DraftTargets = { symbols: [], lines: [] }

function DraftSources({ page }: { page: Page }) {
  const viewer = useViewer()
  const sources = useQuery(sourcesQuery(viewer, page.code))
  const draft = useQuery(draftQuery(viewer, page.code))
  const remove = useRemoveSource(page.code)
  const unlink = useUnlinkSource(page.code)
  const [said, setSaid] = useState('')
  if (sources.isPending) return <Waiting what="Reading the sources" />
  if (sources.isError)
    return <ReadFault error={sources.error} what={`sources of ${page.code}`} onAgain={() => sources.refetch()} />
  const mayWrite = page.may.includes('source:write')
  const targets = draft.data?.targets ?? noTargets
  const fault = remove.error ?? unlink.error
  return (
    <div className="grid grid-cols-1 items-start gap-4 bench:grid-cols-[minmax(0,1fr)_26rem]">
      <section aria-labelledby="sources-heading" className="sheet p-5">
        <h2 id="sources-heading" className="text-subtitle">
          Sources of the draft
        </h2>
        {!mayWrite && page.inReview && (
          <p className="text-note text-ink-2">
            A review is under way: sources can be changed again when it is settled.
          </p>
        )}
        {draft.error && <FaultText>Symbols and lines could not be read: {draft.error.message}</FaultText>}
        {fault && <FaultText>{fault.message}</FaultText>}
        <SourceList
          sources={sources.data.sources}
          onRemove={mayWrite ? (source) => remove.mutate(source.id) : undefined}
          onUnlink={mayWrite ? (link) => unlink.mutate(link.id) : undefined}
          renderActs={
            mayWrite
              ? (source) => (
                  <LinkSource code={page.code} source={source} targets={targets} onOpen={() => draft.refetch()} />
                )
              : undefined
          }
        />
      </section>
      {mayWrite && (
        <section aria-labelledby="add-heading" className="sheet grid gap-3 p-5">
          <h2 id="add-heading" className="text-subtitle">
            Add a source
          </h2>
          <AddSource
            code={page.code}
            onAdded={() => {
              setSaid('Source added')
              announce('Source added')
            }}
          />
          {said && <p className="text-note text-ink-2">{said}</p>}
        </section>
      )}
    </div>
  )
}
