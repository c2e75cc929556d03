import { Navigate, Outlet, useLocation } from 'react-router-dom'
import { useMe } from '#src/api/session.ts'

/** Pages for signed-in people: others are sent to sign in and come back afterwards. */
export function RequireSignIn() {
  const me = useMe()
  const { pathname, search } = useLocation()
  if (me) return <Outlet />
  return <Navigate to={`/sign-in?next=${encodeURIComponent(pathname + search)}`} replace />
}
