import { useEffect, useState } from 'react'
import { useBlocker } from 'react-router-dom'
import { Button } from '#src/components/button.tsx'
import { Dialog } from '#src/components/dialog.tsx'
import type { DraftConnection } from './draft-connection.ts'
import { useConnectionState } from './use-draft-connection.ts'

/** Edits that are on their way are given so long before somebody who leaves is asked, in ms. */
const grace = 600

/**
 * Leaving the draft inside the app waits until every edit is committed. Where that takes longer it asks; it goes on by
 * itself as soon as everything is saved.
 */
export function LeaveGuard({ connection }: { connection: DraftConnection }) {
  const { unsaved, phase } = useConnectionState(connection)
  const blocker = useBlocker(
    ({ currentLocation, nextLocation }) =>
      currentLocation.pathname !== nextLocation.pathname && connection.getState().unsaved > 0,
  )
  const blocked = blocker.state === 'blocked'
  const { proceed, reset } = blocker
  const [asks, setAsks] = useState(false)
  useEffect(() => {
    if (blocked && unsaved === 0) proceed?.()
  }, [blocked, unsaved, proceed])
  useEffect(() => {
    if (!blocked) {
      setAsks(false)
      return
    }
    const timer = setTimeout(() => setAsks(true), phase === 'saving' ? grace : 0)
    return () => clearTimeout(timer)
  }, [blocked, phase])
  const many = unsaved === 1 ? '1 edit is' : `${unsaved} edits are`
  return (
    <Dialog title={`${many} not saved`} open={blocked && asks && unsaved > 0} onClose={() => reset?.()}>
      <p>
        The library does not have {unsaved === 1 ? 'it' : 'them'} yet.{' '}
        {phase === 'refused'
          ? 'It takes nothing more from this tab: copy your lines first.'
          : 'While this page stays open, it tries again by itself.'}
      </p>
      <div className="flex flex-wrap gap-2">
        <Button look="first" onClick={() => reset?.()}>
          Stay
        </Button>
        <Button onClick={() => proceed?.()}>
          {unsaved === 1 ? 'Leave without the edit' : `Leave without ${unsaved} edits`}
        </Button>
      </div>
    </Dialog>
  )
}
