import { useQuery } from '@tanstack/react-query'
import { useMemo } from 'react'
import type { Page } from '#shared/api/pages.ts'
import { revisionQuery } from '#src/api/revisions.ts'
import { useViewer } from '#src/api/session.ts'
import { parseDocument } from '#src/features/revisions/document-parts.ts'
import type { CardState } from '#src/workers/card-runner.ts'

export type Earlier = {
  document: NonNullable<ReturnType<typeof parseDocument>>
  card: NonNullable<CardState['card']>['card']
  label: string
  mark: string
}

/** The revision in force, drawn in pencil behind the draft. */
export function useInForce(page: Page): Earlier | null {
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
