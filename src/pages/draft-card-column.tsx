import { useCallback, useEffect, useMemo, useState } from 'react'
import { compareCards } from '#shared/stability/compare.ts'
import { Button } from '#src/components/button.tsx'
import { PencilLine } from '#src/components/pencil-line.tsx'
import type { DraftConnection } from '#src/features/editor/draft-connection.ts'
import { setControlValue } from '#src/features/editor/draft-tables.ts'
import { StabilityCardView } from '#src/features/stability-card/stability-card-view.tsx'
import { announce } from '#src/lib/announce.ts'
import type { CardState } from '#src/workers/card-runner.ts'
import { progressWords } from './draft-notes.ts'
import type { Earlier } from './use-in-force.ts'
import { useRunningPoint } from './use-running-point.ts'

/** The live card on the right of the co-edit view, with the revision in force in pencil behind where they differ. */
export function DraftCardColumn({
  connection,
  live,
  mayEdit,
  earlier,
  onStop,
}: {
  connection: DraftConnection
  live: CardState
  mayEdit: boolean
  earlier: Earlier | null
  onStop: () => void
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
  const older = errors.length > 0 || (live.failure !== null && live.older)
  return (
    // The card stays in sight while somebody types far down in the tables. Its margin keeps the sheet's shadow.
    <div className="min-w-0 bench:sticky bench:top-2 bench:-m-2 bench:max-h-[calc(100dvh-1rem)] bench:overflow-y-auto bench:p-2">
      <StabilityCardView
        document={shown?.document ?? null}
        card={shown?.card ?? null}
        state={live.computing ? 'computing' : older ? 'older' : 'live'}
        errors={errors}
        trouble={live.failure}
        exact={live.exact}
        computedAt={shown?.at.toISOString() ?? null}
        at={at}
        onAt={setAt}
        onSetValue={setValue}
        mayEdit={mayEdit}
        earlier={same ? null : earlier}
      />
      <RunProgress progress={live.progress} onStop={onStop} />
    </div>
  )
}

/** A run that goes on for so long may be stopped, in ms after its first progress was told. */
const stopAfter = 1500

/** How far a run is that takes long, at the foot of the window while the card is higher: nothing above it moves. */
function RunProgress({ progress, onStop }: { progress: CardState['progress']; onStop: () => void }) {
  const [long, setLong] = useState(false)
  const running = progress !== null
  useEffect(() => {
    if (!running) return
    const timer = setTimeout(() => setLong(true), stopAfter)
    return () => {
      clearTimeout(timer)
      setLong(false)
    }
  }, [running])
  if (!progress) return null
  const words = progressWords(progress)
  return (
    <div className="sticky bottom-2 z-10 mx-4 -mt-14 flex min-h-14 items-center gap-3 rounded-control border-[1.5px] border-ink bg-sheet px-3 py-1.5">
      <div className="grid min-w-0 flex-1 gap-0.5">
        <span className="text-note">{words}</span>
        <PencilLine label={words} share={progress.share} />
      </div>
      {long && <Button onClick={onStop}>Stop</Button>}
    </div>
  )
}
