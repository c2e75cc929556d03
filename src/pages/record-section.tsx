import { useQuery } from '@tanstack/react-query'
import { useState } from 'react'
import type { Page } from '#shared/api/pages.ts'
import { revisionsQuery } from '#src/api/revisions.ts'
import { useViewer } from '#src/api/session.ts'
import { Waiting } from '#src/components/pencil-line.tsx'
import { StateSheet } from '#src/components/state-sheet.tsx'
import { RecordTable } from '#src/features/revisions/record-table.tsx'
import { ReadFault } from './page-gate.tsx'
import { RemovePage } from './remove-page.tsx'

/** Every revision the viewer may read; two can be compared. */
export function RecordSection({ page }: { page: Page }) {
  const revisions = useQuery(revisionsQuery(useViewer(), page.code))
  const [ticked, setTicked] = useState<string[]>([])
  if (revisions.isPending) return <Waiting what="Reading the record" />
  if (revisions.isError)
    return <ReadFault error={revisions.error} what={`record of ${page.code}`} onAgain={() => revisions.refetch()} />
  if (revisions.data.revisions.length === 0) {
    return (
      <StateSheet title="No revision yet" acts={page.may.includes('page:remove') && <RemovePage page={page} />}>
        A revision is made when a draft is sent for review. It stays here for good, with who wrote and who approved it.
      </StateSheet>
    )
  }
  return <RecordTable code={page.code} revisions={revisions.data.revisions} ticked={ticked} onTick={setTicked} />
}
