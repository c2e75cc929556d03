import { useEffect, useRef } from 'react'
import { Navigate, Outlet, useLocation } from 'react-router-dom'
import { useMe } from '#src/api/session.ts'

/** Pages for signed-in people: others are sent to sign in and come back afterwards. */
export function RequireSignIn() {
  const me = useMe()
  const { pathname, search } = useLocation()
  // Whoever was signed in on this screen did not come without a session: it ended, and the sign-in page says so.
  const signedIn = useRef(false)
  useEffect(() => {
    signedIn.current = me !== null
  }, [me])
  if (me) return <Outlet />
  return (
    <Navigate
      to={`/sign-in?next=${encodeURIComponent(pathname + search)}`}
      state={{ ended: signedIn.current }}
      replace
    />
  )
}
