import { useQuery } from '@tanstack/react-query'
import { ServerOff } from 'lucide-react'
import { useEffect, useRef, useState } from 'react'
import { Outlet, ScrollRestoration, useLocation } from 'react-router-dom'
import { sessionQuery } from '#src/api/session.ts'
import { Button, ButtonLink } from '#src/components/button.tsx'
import { LiveRegion } from '#src/components/live-region.tsx'
import { Waiting } from '#src/components/pencil-line.tsx'
import { StateSheet } from '#src/components/state-sheet.tsx'
import { type Place, TopBar } from '#src/components/top-bar.tsx'
import { AccountMenu } from './account-menu.tsx'
import { KeysDialog } from './keys-dialog.tsx'
import { usePlaceKeys } from './use-place-keys.ts'

// Screens that stand alone on the film, without the bar.
const bare = /^\/(sign-in|setup|invitations|passwords)(\/|$)/

/** Bar, screen and live region. No screen is drawn before it is known who is looking. */
export function AppShell() {
  const session = useQuery(sessionQuery)
  const { pathname } = useLocation()
  const [keysShown, setKeysShown] = useState(false)
  usePlaceKeys(() => setKeysShown(true))
  const content = useFocusAfterNavigation(pathname)

  const me = session.data?.me ?? null
  const places: Place[] = [
    { to: '/', label: 'Library', current: pathname === '/' || pathname === '/new' || pathname.startsWith('/m/') },
    ...(me
      ? [
          { to: '/reviews', label: 'Reviews', count: me.toReview, current: pathname.startsWith('/reviews') },
          { to: '/groups', label: 'Groups', current: pathname.startsWith('/groups') },
        ]
      : []),
  ]
  return (
    <>
      {!bare.test(pathname) && (
        <TopBar
          places={places}
          search={pathname !== '/'}
          account={
            <>
              {!me && session.isSuccess && (
                <ButtonLink to={`/sign-in?next=${encodeURIComponent(pathname)}`} look="first">
                  Sign in
                </ButtonLink>
              )}
              <AccountMenu me={me} places={places} onKeys={() => setKeysShown(true)} />
            </>
          }
        />
      )}
      <div id="main" ref={content} tabIndex={-1} className="flex flex-1 flex-col">
        {session.isPending && <Waiting what="Opening the library" />}
        {session.isError && <NoAnswer message={session.error.message} onAgain={() => session.refetch()} />}
        {session.isSuccess && <Outlet />}
      </div>
      <LiveRegion />
      <KeysDialog open={keysShown} onClose={() => setKeysShown(false)} />
      <ScrollRestoration />
    </>
  )
}

function NoAnswer({ message, onAgain }: { message: string; onAgain: () => void }) {
  return (
    <main className="grid flex-1 place-items-center p-6">
      <title>The library did not answer · Brinkbook</title>
      <StateSheet
        urgent
        level={1}
        picture={<ServerOff aria-hidden className="size-10" strokeWidth={1.5} />}
        title="The library did not answer"
        acts={<Button onClick={onAgain}>Try again now</Button>}
      >
        {message}
      </StateSheet>
    </main>
  )
}

/** After a change of screen the focus stands at its beginning, so that keyboard and screen reader start there. */
function useFocusAfterNavigation(pathname: string) {
  const content = useRef<HTMLDivElement>(null)
  const before = useRef(pathname)
  useEffect(() => {
    if (before.current === pathname) return
    before.current = pathname
    // A screen that has put the focus somewhere itself keeps it.
    if (!content.current?.contains(document.activeElement)) content.current?.focus({ preventScroll: true })
  }, [pathname])
  return content
}
