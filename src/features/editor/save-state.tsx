import { CircleAlert, Unplug } from 'lucide-react'
import { Button } from '#src/components/button.tsx'
import type { DraftConnection, DraftConnectionState } from './draft-connection.ts'
import { useConnectionState } from './use-draft-connection.ts'

/** Saving, Saved or Offline: "Saved" only once the library has committed every edit of this tab. */
export function SaveState({ connection }: { connection: DraftConnection }) {
  const state = useConnectionState(connection)
  // Read out only where something is wrong: "Saving, Saved" after every key would drown everything else.
  const calm =
    state.phase === 'connecting' || state.phase === 'saved' || (state.phase === 'saving' && state.room !== 'not-saving')
  return (
    <span aria-live={calm ? 'off' : 'polite'} className="inline-flex min-h-8 items-center gap-1.5 text-note text-ink-2">
      {state.phase === 'offline' && <Unplug aria-hidden className="size-4" />}
      {saveWords(state)}
    </span>
  )
}

function saveWords(state: DraftConnectionState): string {
  switch (state.phase) {
    case 'connecting':
      return 'Opening the draft'
    case 'saved':
      return 'Saved'
    case 'saving':
      return state.room === 'not-saving' ? 'Not saving' : 'Saving'
    case 'offline':
      return state.unsaved === 0
        ? 'Offline'
        : `Offline, ${state.unsaved === 1 ? '1 edit' : `${state.unsaved} edits`} kept here`
    case 'refused':
      return 'Stopped'
  }
}

/** What the page says across its top when the draft does not simply take edits. Null where it does. */
export function DraftBand({ connection, onReload }: { connection: DraftConnection; onReload: () => void }) {
  const state = useConnectionState(connection)
  if (state.phase === 'refused' && state.closed)
    return <RefusedBand connection={connection} text={state.closed.text} onReload={onReload} />
  if (state.phase === 'offline') {
    return (
      <Band title="Working without the others">
        {state.unsaved > 0
          ? 'Your edits are kept in this tab and sent when the line is back. '
          : 'What you type is kept in this tab and sent when the line is back. '}
        <Button look="quiet" onClick={() => connection.retryNow()}>
          Try again now
        </Button>
      </Band>
    )
  }
  if (state.room === 'locked')
    return (
      <Band title="In review">
        The draft cannot be edited until the review is settled. Returning it opens it again.
      </Band>
    )
  if (state.room === 'read-only')
    return (
      <Band title="You read this draft">
        Contributors and maintainers of the group write in it. What they type appears here as they type.
      </Band>
    )
  if (state.room === 'full')
    return (
      <Band title="Full: 64 KiB of equations">
        What is over the limit is not taken. Take some text away; the card still runs.
      </Band>
    )
  if (state.room === 'not-saving')
    return (
      <Band title="Not saving">
        The library cannot store edits just now. Nothing is lost: it tries again by itself. Do not close this tab.
      </Band>
    )
  return null
}

function Band({ title, children }: { title: string; children: React.ReactNode }) {
  return (
    <div
      role="status"
      className="flex flex-wrap items-center gap-x-3 gap-y-1 border-y-[1.5px] border-ink bg-sheet px-4 py-2"
    >
      <b>{title}</b>
      <span className="inline-flex flex-wrap items-center gap-2">{children}</span>
    </div>
  )
}

/** The server decided: what was not saved is offered as lines to copy, never merged by itself. */
function RefusedBand({
  connection,
  text,
  onReload,
}: {
  connection: DraftConnection
  text: string
  onReload: () => void
}) {
  const { lines, cells } = connection.unsavedEdits()
  const kept = [...lines, ...cells.map((cell) => `# ${cell.table} ${cell.row} ${cell.cell}: ${cell.value}`)].join('\n')
  return (
    <div role="alert" className="grid gap-2 border-y-[1.5px] border-ink bg-sheet px-4 py-3">
      <p className="flex flex-wrap items-center gap-2">
        <CircleAlert aria-hidden className="size-4 text-fault" />
        <b>{text}</b>
        <Button onClick={onReload}>Load the draft again</Button>
      </p>
      {kept !== '' && (
        <label className="grid gap-1 text-note">
          What you typed and the library does not have. Copy the lines you want to put in again.
          <textarea
            readOnly
            rows={Math.min(8, kept.split('\n').length + 1)}
            value={kept}
            className="figures w-full rounded-control border border-line bg-well p-2 text-note"
          />
        </label>
      )}
    </div>
  )
}
