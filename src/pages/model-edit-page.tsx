import { useQueryClient } from '@tanstack/react-query'
import { useCallback, useEffect } from 'react'
import { useParams } from 'react-router-dom'
import type { Page } from '#shared/api/pages.ts'
import { keys } from '#src/api/keys.ts'
import { useViewer } from '#src/api/session.ts'
import { PencilLine, Waiting } from '#src/components/pencil-line.tsx'
import type { DraftConnection } from '#src/features/editor/draft-connection.ts'
import { KeptLines } from '#src/features/editor/kept-lines.tsx'
import { LeaveGuard } from '#src/features/editor/leave-guard.tsx'
import { PresenceRings } from '#src/features/editor/presence-rings.tsx'
import { DraftBand, isOpenToEdits, SaveState } from '#src/features/editor/save-state.tsx'
import { useConnectionState, useDraftConnection } from '#src/features/editor/use-draft-connection.ts'
import { useDraftContent } from '#src/features/editor/use-draft-content.ts'
import { ModelHead } from '#src/features/revisions/model-head.tsx'
import { VerdictBar } from '#src/features/stability-card/verdict-bar.tsx'
import { useLiveCard } from '#src/workers/use-live-card.ts'
import { DraftCardColumn } from './draft-card-column.tsx'
import { DraftModelColumn } from './draft-model-column.tsx'
import { EditActs, RenewDraft } from './edit-acts.tsx'
import { PageGate } from './page-gate.tsx'
import { useCommandKey } from './use-command-key.ts'
import { useInForce } from './use-in-force.ts'
import { useRunningPoint } from './use-running-point.ts'

/** The co-edit view: one draft, everybody in it at once, the card beside it following every edit. */
export function ModelEditPage() {
  const { page: code = '' } = useParams()
  // The draft stays open when its head cannot be read again: what is typed in it must not go with it.
  return (
    <PageGate keep code={code}>
      {(page) => <Draft key={page.id} page={page} />}
    </PageGate>
  )
}

function Draft({ page }: { page: Page }) {
  const queryClient = useQueryClient()
  const viewer = useViewer()
  const { connection, renew } = useDraftConnection(page.id, viewer)
  const reload = useCallback(() => {
    queryClient.invalidateQueries({ queryKey: keys.page(viewer, page.code) })
    renew()
  }, [queryClient, viewer, page.code, renew])
  if (!connection) return <Waiting what="Opening the draft" />
  return <Editing page={page} connection={connection} onReload={reload} />
}

function Editing({ page, connection, onReload }: { page: Page; connection: DraftConnection; onReload: () => void }) {
  const state = useConnectionState(connection)
  const content = useDraftContent(connection.doc)
  const [at] = useRunningPoint()
  const { live, again, stop } = useLiveCard(state.synced ? content : null, at)
  const viewer = useViewer()
  const readOnly = !isOpenToEdits(state)
  useCommandKey('again', again)
  const renew =
    page.may.includes('draft:renew') && state.generation !== null ? (
      <RenewDraft code={page.code} generation={state.generation} />
    ) : null
  useFreshHead(page, state.room, state.generation)
  const earlier = useInForce(page)
  const title = content.settings.title || page.title
  return (
    <main className="mx-auto grid w-full grid-cols-1 max-w-[1920px] content-start gap-3 px-6 py-4 max-tablet:px-4">
      <title>{`${title} (draft) · ${page.code} · Brinkbook`}</title>
      <ModelHead
        page={page}
        revision={null}
        title={title}
        note={content.settings.summary || page.summary}
        current={['model', 'behaviour']}
        editing
        acts={
          <>
            <SaveState connection={connection} />
            <PresenceRings connection={connection} />
            <EditActs page={page} connection={connection} live={live} />
          </>
        }
      />
      <LeaveGuard connection={connection} />
      <DraftBand connection={connection} onReload={onReload} renew={renew} />
      <KeptLines person={viewer} page={page.id} />
      {!state.synced && state.phase !== 'refused' && <PencilLine label="Opening the draft" />}
      {/* Its place is kept before the first card, so that nothing jumps when it comes. */}
      {!live.card && <div aria-hidden className="sheet h-12 bench:hidden" />}
      {live.card && (
        <VerdictBar
          document={live.card.document}
          card={live.card.card}
          older={live.older && !live.computing}
          className="sheet sticky top-0 z-20 border-b border-rule bench:hidden"
        />
      )}
      {/* What gets the focus is not to stand under the bar. Before the draft has come there is nothing to lay out. */}
      {state.synced && (
        <div className="grid grid-cols-1 items-start gap-4 max-bench:[&_:is(input,select,textarea,button,[role=slider])]:scroll-mt-16 bench:grid-cols-[minmax(0,432px)_minmax(0,1fr)] wide:grid-cols-[480px_minmax(0,1fr)]">
          <DraftModelColumn connection={connection} live={live} readOnly={readOnly} earlier={earlier} />
          <DraftCardColumn connection={connection} live={live} mayEdit={!readOnly} earlier={earlier} onStop={stop} />
        </div>
      )}
    </main>
  )
}

/** When the room says that a review began or ended, the head of the page is read again. */
function useFreshHead(page: Page, room: string | null, generation: number | null): void {
  const queryClient = useQueryClient()
  const viewer = useViewer()
  const locked = room === 'locked'
  const known = page.inReview !== null
  const drifted =
    room !== null &&
    (locked !== known || (generation !== null && page.draft !== null && generation !== page.draft.generation))
  useEffect(() => {
    if (drifted) queryClient.invalidateQueries({ queryKey: keys.pageHead(viewer, page.code) })
  }, [drifted, queryClient, viewer, page.code])
}
