import { CircleAlert, Unplug } from 'lucide-react'
import { Button } from '#src/components/button.tsx'
import type { DraftConnection, DraftConnectionState } from './draft-connection.ts'
import { editsAsText } from './kept-edits.ts'
import { LinesToCopy } from './kept-lines.tsx'
import { useConnectionState } from './use-draft-connection.ts'

/** Saving, Saved or Offline: "Saved" only once the library has committed every edit of this tab. */
export function SaveState({ connection }: { connection: DraftConnection }) {
  const state = useConnectionState(connection)
  // Read out only where something is wrong: "Saving, Saved" after every key would drown everything else.
  const calm =
    state.phase === 'connecting' || state.phase === 'saved' || (state.phase === 'saving' && state.room === 'live')
  return (
    <span aria-live={calm ? 'off' : 'polite'} className="inline-flex min-h-8 items-center gap-1.5 text-note text-ink-2">
      {state.phase === 'offline' && <Unplug aria-hidden className="size-4" />}
      {saveWords(state)}
    </span>
  )
}

const editsInWords = (count: number) => (count === 1 ? '1 edit' : `${count} edits`)

export function saveWords(state: DraftConnectionState): string {
  switch (state.phase) {
    case 'connecting':
      return 'Opening the draft'
    case 'saved':
      // Until the room said that it takes edits the editor takes none, and "Saved" would invite them.
      return state.room === null ? 'Opening the draft' : 'Saved'
    case 'saving':
      if (state.room === 'live' || state.room === null) return 'Saving'
      // Held back, for a reason that stands in the band.
      return state.room === 'not-saving' ? 'Not saving' : `Not saved: ${editsInWords(state.unsaved)}`
    case 'offline':
      return state.unsaved === 0 ? 'Offline' : `Offline, ${editsInWords(state.unsaved)} kept here`
    case 'refused':
      return 'Stopped'
  }
}

/**
 * May be typed into. While the line is cut it may: the edits are kept and sent later. While the database takes nothing it
 * may not: nobody knows how long that lasts, and what is typed would exist in this tab only.
 */
export function isOpenToEdits({ synced, phase, room }: DraftConnectionState): boolean {
  return synced && phase !== 'refused' && (room === 'live' || room === 'full')
}

/** What the page says across its top when the draft does not simply take edits. Null where it does. */
export function DraftBand({
  connection,
  onReload,
  renew,
}: {
  connection: DraftConnection
  onReload: () => void
  /** For maintainers: the act that begins the draft anew from what it says. */
  renew: React.ReactNode
}) {
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
  if (state.room === 'no-room')
    return (
      <Band title="Full: the steps of this draft">
        <span>
          The library keeps every step of a draft, up to 2 MiB, and this one has gone that far: it takes nothing more,
          nor can anything be taken away. The card still runs.{' '}
          {renew
            ? 'Begun anew it holds what it says now, without the steps.'
            : 'A maintainer can begin it anew from what it says now.'}
        </span>
        {renew}
        <NotTaken connection={connection} />
      </Band>
    )
  if (state.room === 'not-saving')
    return (
      <Band title="Not saving">
        The library cannot store edits just now, so nothing can be typed. What you typed is kept in this tab and stored
        as soon as it can be; it tries again by itself. Do not close this tab.
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

/** The server decided: what was not saved is offered as lines to copy, never merged by itself. They outlive the reload. */
function RefusedBand({
  connection,
  text,
  onReload,
}: {
  connection: DraftConnection
  text: string
  onReload: () => void
}) {
  return (
    <div role="alert" className="grid gap-2 border-y-[1.5px] border-ink bg-sheet px-4 py-3">
      <p className="flex flex-wrap items-center gap-2">
        <CircleAlert aria-hidden className="size-4 text-fault" />
        <b>{text}</b>
        <Button onClick={onReload}>Load the draft again</Button>
      </p>
      <NotTaken connection={connection} />
    </div>
  )
}

/** Edits of this tab that the library does not take, to be copied. */
function NotTaken({ connection }: { connection: DraftConnection }) {
  const { unsaved } = useConnectionState(connection)
  const text = unsaved > 0 ? editsAsText(connection.unsavedEdits()) : ''
  if (text === '') return null
  return <LinesToCopy text={text} words="What you typed and the library does not have." />
}
