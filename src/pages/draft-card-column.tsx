import { useCallback, useMemo } from 'react'
import { compareCards } from '#shared/stability/compare.ts'
import type { DraftConnection } from '#src/features/editor/draft-connection.ts'
import { setControlValue } from '#src/features/editor/draft-tables.ts'
import { StabilityCardView } from '#src/features/stability-card/stability-card-view.tsx'
import { announce } from '#src/lib/announce.ts'
import type { CardState } from '#src/workers/card-runner.ts'
import type { Earlier } from './use-in-force.ts'
import { useRunningPoint } from './use-running-point.ts'

/** The live card on the right of the co-edit view, with the revision in force in pencil behind where they differ. */
export function DraftCardColumn({
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
      exact={live.exact}
      computedAt={shown?.at.toISOString() ?? null}
      at={at}
      onAt={setAt}
      onSetValue={setValue}
      mayEdit={mayEdit}
      earlier={same ? null : earlier}
    />
  )
}
