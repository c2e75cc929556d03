import { useQuery, useQueryClient } from '@tanstack/react-query'
import { useCallback, useEffect, useMemo, useState } from 'react'
import { useNavigate, useParams } from 'react-router-dom'
import type { Page } from '#shared/api/pages.ts'
import type { ModelError } from '#shared/model/errors.ts'
import { compareCards } from '#shared/stability/compare.ts'
import { keys } from '#src/api/keys.ts'
import { revisionQuery } from '#src/api/revisions.ts'
import { useViewer } from '#src/api/session.ts'
import { Button, ButtonLink } from '#src/components/button.tsx'
import { PencilLine, Waiting } from '#src/components/pencil-line.tsx'
import { Segments } from '#src/components/segments.tsx'
import type { DraftConnection } from '#src/features/editor/draft-connection.ts'
import { setControlValue } from '#src/features/editor/draft-tables.ts'
import { EquationEditor } from '#src/features/editor/equation-editor.tsx'
import type { LineMessage } from '#src/features/editor/line-messages.ts'
import { ParameterTable } from '#src/features/editor/parameter-table.tsx'
import { PresenceRings } from '#src/features/editor/presence-rings.tsx'
import { DraftBand, SaveState } from '#src/features/editor/save-state.tsx'
import { SettingsFields } from '#src/features/editor/settings-fields.tsx'
import { StateTable } from '#src/features/editor/state-table.tsx'
import { useConnectionState, useDraftConnection } from '#src/features/editor/use-draft-connection.ts'
import { useDraftContent } from '#src/features/editor/use-draft-content.ts'
import { parseDocument } from '#src/features/revisions/document-parts.ts'
import { EquationLines, Formula } from '#src/features/revisions/equation-lines.tsx'
import { ModelHead } from '#src/features/revisions/model-head.tsx'
import { SendDialog } from '#src/features/revisions/revision-acts.tsx'
import { StabilityCardView } from '#src/features/stability-card/stability-card-view.tsx'
import { announce } from '#src/lib/announce.ts'
import { shortFigure } from '#src/lib/figures.ts'
import type { CardState } from '#src/workers/card-runner.ts'
import { useLiveCard } from '#src/workers/use-live-card.ts'
import { PageGate } from './page-gate.tsx'
import { useRunningPoint } from './use-running-point.ts'

/** The co-edit view: one draft, everybody in it at once, the card beside it following every edit. */
export function ModelEditPage() {
  const { page: code = '' } = useParams()
  return <PageGate code={code}>{(page) => <Draft key={page.id} page={page} />}</PageGate>
}

function Draft({ page }: { page: Page }) {
  const { connection, renew } = useDraftConnection(page.id)
  const queryClient = useQueryClient()
  const viewer = useViewer()
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
  const live = useLiveCard(state.synced ? content : null)
  const readOnly =
    !state.synced ||
    state.phase === 'refused' ||
    (state.room !== 'live' && state.room !== 'not-saving' && state.room !== 'full')
  useFreshHead(page, state.room, state.generation)
  const earlier = useInForce(page)
  const title = content.settings.title || page.title
  return (
    <main className="mx-auto grid w-full max-w-[1920px] content-start gap-3 px-6 py-4 max-tablet:px-4">
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
      <DraftBand connection={connection} onReload={onReload} />
      {!state.synced && state.phase !== 'refused' && <PencilLine label="Opening the draft" />}
      <div className="grid items-start gap-4 bench:grid-cols-[minmax(0,432px)_minmax(0,1fr)] wide:grid-cols-[480px_minmax(0,1fr)]">
        <ModelColumn page={page} connection={connection} live={live} readOnly={readOnly} earlier={earlier} />
        <CardColumn connection={connection} live={live} mayEdit={!readOnly} earlier={earlier} />
      </div>
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

type Earlier = {
  document: NonNullable<ReturnType<typeof parseDocument>>
  card: NonNullable<CardState['card']>['card']
  label: string
  mark: string
}

/** The revision in force, drawn in pencil behind the draft. */
function useInForce(page: Page): Earlier | null {
  const mark = page.inForce?.mark ?? null
  const answer = useQuery({
    ...revisionQuery(useViewer(), page.code, mark ?? '0.0.0'),
    enabled: mark !== null,
    staleTime: Number.POSITIVE_INFINITY,
  })
  return useMemo(() => {
    const revision = mark === null ? null : answer.data?.revision
    const document = revision ? parseDocument(revision.document) : null
    if (!revision?.stabilityCard || !document || mark === null) return null
    return { document, card: revision.stabilityCard, label: `revision ${mark}`, mark }
  }, [answer.data, mark])
}

function EditActs({ page, connection, live }: { page: Page; connection: DraftConnection; live: CardState }) {
  const state = useConnectionState(connection)
  const navigate = useNavigate()
  const [sending, setSending] = useState(false)
  const mayWrite = page.may.includes('draft:write')
  useSendKey(() => setSending(true), mayWrite)
  if (page.inReview) {
    return (
      <ButtonLink to={`/reviews/${page.code}/${page.inReview.mark}`} look="first">
        Open the review
      </ButtonLink>
    )
  }
  if (!mayWrite) return null
  const why =
    state.phase !== 'saved'
      ? 'Wait until every edit is saved.'
      : live.checked?.errors.length
        ? 'Settle the faults first.'
        : null
  return (
    <>
      <Button
        look="first"
        unavailable={why}
        showReason={false}
        onClick={() => setSending(true)}
        title={why ?? undefined}
      >
        Send for review
      </Button>
      <SendDialog
        code={page.code}
        generation={state.generation ?? page.draft?.generation ?? 1}
        open={sending && why === null}
        onClose={() => setSending(false)}
        onSent={(revision) => {
          announce('Sent for review')
          navigate(`/m/${page.code}/rev/${revision.mark}`)
        }}
      />
    </>
  )
}

/** Ctrl+Shift+Enter opens the dialog, from anywhere on the page. */
function useSendKey(onKey: () => void, active: boolean): void {
  useEffect(() => {
    if (!active) return
    const listen = (event: KeyboardEvent) => {
      if (event.key === 'Enter' && event.shiftKey && (event.ctrlKey || event.metaKey)) {
        event.preventDefault()
        onKey()
      }
    }
    window.addEventListener('keydown', listen)
    return () => window.removeEventListener('keydown', listen)
  })
}

interface ColumnProps {
  page: Page
  connection: DraftConnection
  live: CardState
  readOnly: boolean
  earlier: Earlier | null
}

function ModelColumn({ connection, live, readOnly, earlier }: ColumnProps) {
  const { doc, awareness } = connection
  const content = useDraftContent(doc)
  const [shape, setShape] = useState<'typed' | 'typeset'>('typed')
  const [line, setLine] = useState(1)
  const checked = live.checked
  const faults = useMemo(() => faultsByPath(checked?.errors ?? []), [checked])
  const messages = useMemo(() => messagesOf(live), [live])
  const values = useMemo(() => valuesOf(live), [live])
  const names = useMemo(
    () =>
      [
        ...content.parameters.map((row) => ({
          symbol: row.symbol,
          detail: [row.meaning, row.value, row.unit].filter(Boolean).join(' '),
        })),
        ...content.states.map((row) => ({ symbol: row.symbol, detail: row.meaning || 'state' })),
        ...(checked?.helpers ?? []).map((symbol) => ({ symbol, detail: 'helper quantity' })),
      ].filter(({ symbol }) => symbol !== ''),
    [content.parameters, content.states, checked],
  )
  const changed = useMemo(() => changedSymbols(content.parameters, earlier), [content.parameters, earlier])
  const atCaret = checked?.lines.find((entry) => entry.line === line && entry.tex !== null)
  const document = live.card?.document
  const control = document?.parameters.find((row) => row.symbol === document.control)
  return (
    <section aria-label="Model" className="sheet grid min-w-0 content-start">
      <header className="flex flex-wrap items-center justify-between gap-2 px-4 py-2.5">
        <h2 className="text-subtitle">Equations</h2>
        <Segments
          label="How the equations are shown"
          value={shape}
          onChange={setShape}
          options={[
            { value: 'typed', label: 'Typed' },
            { value: 'typeset', label: 'Typeset' },
          ]}
        />
        {control && (
          <span className="text-label text-ink-2">{`values at ${control.symbol} = ${shortFigure(control.value)}`}</span>
        )}
      </header>
      <div hidden={shape !== 'typed'}>
        <EquationEditor
          text={doc.getText('equations')}
          awareness={awareness}
          readOnly={readOnly}
          messages={messages}
          values={values}
          names={names}
          onLine={setLine}
        />
        <p className="min-h-11 border-b border-rule px-4 py-2">
          <span className="block text-label text-ink-3">line at the caret</span>
          {atCaret ? <Formula tex={atCaret.tex} text={atCaret.text} /> : <span className="text-ink-3">–</span>}
        </p>
      </div>
      {shape === 'typeset' && (
        <div className="bg-well px-4 py-3">
          <EquationLines
            lines={(checked?.lines ?? []).map((entry) => ({
              ...entry,
              kind: entry.kind === 'unread' ? 'helper' : entry.kind,
            }))}
          />
        </div>
      )}
      <Part title="Parameters">
        <ParameterTable doc={doc} content={content} readOnly={readOnly} faults={faults} changed={changed} />
      </Part>
      <Part title="States">
        <StateTable doc={doc} content={content} readOnly={readOnly} faults={faults} />
      </Part>
      <Part title="Settings and notes">
        <SettingsFields
          doc={doc}
          content={content}
          readOnly={readOnly}
          faults={faults}
          helpers={checked?.helpers ?? []}
        />
      </Part>
    </section>
  )
}

function Part({ title, children }: { title: string; children: React.ReactNode }) {
  return (
    <section aria-label={title} className="border-t border-rule px-4 py-3">
      <h2 className="mb-1 text-subtitle">{title}</h2>
      {children}
    </section>
  )
}

function CardColumn({
  connection,
  live,
  mayEdit,
  earlier,
}: {
  connection: DraftConnection
  live: CardState
  mayEdit: boolean
  earlier: Earlier | null
}) {
  const [at, setAt] = useRunningPoint()
  const errors = live.checked?.errors ?? []
  const shown = live.card
  const setValue = useCallback(
    (value: number) => {
      if (setControlValue(connection.doc, value)) {
        setAt(null)
        announce("Set as the page's value")
      }
    },
    [connection, setAt],
  )
  const same = useMemo(() => {
    if (!earlier || !shown) return false
    const comparison = compareCards(
      { document: earlier.document, card: earlier.card },
      { document: shown.document, card: shown.card },
    )
    return comparison.differences.length === 0
  }, [earlier, shown])
  return (
    <StabilityCardView
      document={shown?.document ?? null}
      card={shown?.card ?? null}
      state={live.computing ? 'computing' : errors.length > 0 || live.failure ? 'older' : 'live'}
      errors={errors}
      trouble={live.failure}
      computedAt={shown?.at.toISOString() ?? null}
      at={at}
      onAt={setAt}
      onSetValue={setValue}
      mayEdit={mayEdit}
      earlier={same ? null : earlier}
    />
  )
}

/** Faults that belong to a cell or a setting, by their path in the model document. */
function faultsByPath(errors: readonly ModelError[]): Map<string, string> {
  const faults = new Map<string, string>()
  for (const error of errors) {
    if (error.path !== undefined && error.line === undefined && !faults.has(error.path))
      faults.set(error.path, error.message)
  }
  return faults
}

/** Faults and warnings that speak of a line, under that line. */
function messagesOf(live: CardState): LineMessage[] {
  const faults = (live.checked?.errors ?? []).flatMap((error): LineMessage[] =>
    error.line === undefined
      ? []
      : [
          {
            line: error.line,
            column: error.column,
            length: error.length,
            message: error.message,
            severity: 'fault',
            cures: error.cures ?? [],
          },
        ],
  )
  const fromCard =
    live.card && live.card.id === live.checked?.id ? live.card.card.warnings : (live.checked?.warnings ?? [])
  const warnings = fromCard.flatMap((warning): LineMessage[] =>
    warning.line === undefined
      ? []
      : [{ line: warning.line, message: warning.message, severity: 'warning', cures: [] }],
  )
  return [...faults, ...warnings]
}

/** At the right margin: values of the helpers, numbers of the equations. */
function valuesOf(live: CardState) {
  const helpers =
    live.card && live.card.id === live.checked?.id
      ? live.card.helperValues.map(({ line, value }) => ({ line, text: shortFigure(value) }))
      : []
  const equations = (live.checked?.lines ?? [])
    .filter((entry) => entry.kind === 'equation')
    .map((entry, index) => ({ line: entry.line, text: `(${index + 1})` }))
  return [...helpers, ...equations]
}

/** Parameters whose row differs from the revision in force. */
function changedSymbols(
  rows: readonly { symbol: string; value: string; low: string; high: string; unit: string }[],
  earlier: Earlier | null,
) {
  if (!earlier) return null
  const old = new Map(earlier.document.parameters.map((row) => [row.symbol, row]))
  const text = (value: number | undefined) => (value === undefined ? '' : String(value))
  const symbols = new Set(
    rows
      .filter((row) => {
        const before = old.get(row.symbol)
        if (!before) return row.symbol !== ''
        const number = (cell: string) =>
          cell.trim() === '' ? '' : String(Number(cell.replace('\u2212', '-').replace(',', '.')))
        return (
          number(row.value) !== text(before.value) ||
          number(row.low) !== text(before.low) ||
          number(row.high) !== text(before.high) ||
          row.unit !== (before.unit ?? '')
        )
      })
      .map((row) => row.symbol),
  )
  return { symbols, mark: earlier.mark }
}
