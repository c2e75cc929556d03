import { useQueryClient } from '@tanstack/react-query'
import { useLocation } from 'react-router-dom'
import { actWords } from '#src/api/act-words.ts'
import { keys } from '#src/api/keys.ts'
import { useViewer } from '#src/api/session.ts'
import { ActFault } from '#src/components/act-fault.tsx'
import { Button, ButtonLink } from '#src/components/button.tsx'

/** A refused approval or return, with what to do first. Null where nothing was refused. */
export function RefusedAct({ error, code, notDone }: { error: Error | null; code: string; notDone: string }) {
  const queryClient = useQueryClient()
  const viewer = useViewer()
  const { pathname } = useLocation()
  if (!error) return null
  const { headline, text, first } = actWords(error, notDone)
  return (
    <ActFault headline={headline} text={text}>
      {first === 'read-again' && (
        <Button onClick={() => queryClient.invalidateQueries({ queryKey: keys.page(viewer, code) })}>
          Read it again
        </Button>
      )}
      {first === 'open-page' && <ButtonLink to={`/m/${code}`}>Open what is in force</ButtonLink>}
      {first === 'sign-in' && (
        <ButtonLink to={`/sign-in?next=${encodeURIComponent(pathname)}`}>Sign in and go on</ButtonLink>
      )}
    </ActFault>
  )
}
