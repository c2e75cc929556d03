import { ServerOff } from 'lucide-react'
import { isRouteErrorResponse, useRouteError } from 'react-router-dom'
import { Button } from '#src/components/button.tsx'
import { StateSheet } from '#src/components/state-sheet.tsx'
import { NothingHerePage } from '#src/pages/nothing-here-page.tsx'

// A piece of the program that is not there any more: a newer one was put on the server since this page was opened.
const isOldPiece = (error: unknown) => error instanceof TypeError && /import|module|fetch/i.test(error.message)

/** What stands in place of a screen that failed. */
export function ErrorPage() {
  const error = useRouteError()
  if (isRouteErrorResponse(error) && error.status === 404) return <NothingHerePage />
  return (
    <main className="grid flex-1 place-items-center p-6">
      <title>Something failed · Brinkbook</title>
      <StateSheet
        urgent
        level={1}
        picture={<ServerOff aria-hidden className="size-10" strokeWidth={1.5} />}
        title={isOldPiece(error) ? 'This screen could not be loaded' : 'This screen failed'}
        acts={
          <Button look="first" onClick={() => location.reload()}>
            Load it again
          </Button>
        }
      >
        {isOldPiece(error)
          ? 'The server did not answer, or a newer version stands on it. Nothing saved is lost.'
          : 'A fault in the program, not in your work. What was saved stays saved.'}
      </StateSheet>
    </main>
  )
}
