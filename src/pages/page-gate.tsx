import { useQuery } from '@tanstack/react-query'
import type { ReactNode } from 'react'
import { Navigate, useLocation } from 'react-router-dom'
import type { Page } from '#shared/api/pages.ts'
import { ApiProblem } from '#src/api/api-problem.ts'
import { pageQuery } from '#src/api/pages.ts'
import { useViewer } from '#src/api/session.ts'
import { Button } from '#src/components/button.tsx'
import { Waiting } from '#src/components/pencil-line.tsx'
import { StateSheet } from '#src/components/state-sheet.tsx'
import { NothingHere } from './nothing-here-page.tsx'

/** What stands in the place of a screen whose data could not be read. Signed out: to the sign-in page and back. */
export function ReadFault({ error, what, onAgain }: { error: Error; what: string; onAgain: () => void }) {
  const { pathname, search } = useLocation()
  if (error instanceof ApiProblem && error.code === 'not-signed-in') {
    return <Navigate to={`/sign-in?next=${encodeURIComponent(pathname + search)}`} replace />
  }
  if (error instanceof ApiProblem && (error.code === 'not-found' || error.code === 'may-not'))
    return <NothingHere what={what} />
  return (
    <main className="grid flex-1 place-items-center p-6">
      <title>Not read · Brinkbook</title>
      <StateSheet
        urgent
        level={1}
        title="This could not be read"
        acts={<Button onClick={onAgain}>Try again now</Button>}
      >
        {error.message}
      </StateSheet>
    </main>
  )
}

/**
 * Reads the head of a page and shows what stands in its place until it is there. `keep`: what was read once stays when it
 * cannot be read again; for a screen that holds unsaved work and hears by itself when its right to stand ends.
 */
export function PageGate({
  code,
  keep = false,
  children,
}: {
  code: string
  keep?: boolean
  children: (page: Page) => ReactNode
}) {
  const viewer = useViewer()
  const page = useQuery(pageQuery(viewer, code))
  if (page.isPending) return <Waiting what={`Opening ${code}`} />
  if (page.isError && keep && page.data) return children(page.data)
  if (page.isError) return <ReadFault error={page.error} what={`page ${code}`} onAgain={() => page.refetch()} />
  return children(page.data)
}
