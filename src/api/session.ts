import { queryOptions, useMutation, useQuery, useQueryClient } from '@tanstack/react-query'
import {
  changePassword,
  type Me,
  readSession,
  type SessionState,
  signIn,
  signOut,
  signOutEverywhere,
} from '#shared/api/session.ts'
import { keepBrowserChoices } from '#src/lib/browser-choices.ts'
import { call } from './client.ts'
import { keys } from './keys.ts'

export const sessionQuery = queryOptions({
  queryKey: keys.session,
  queryFn: ({ signal }) => call(readSession, { signal }),
  staleTime: 60_000,
  refetchOnWindowFocus: true,
})

/** The signed-in person; null while nobody is, or while it is not known yet. */
export function useMe(): Me | null {
  return useQuery(sessionQuery).data?.me ?? null
}

/** The viewer's number for query keys; 0 while nobody is signed in. */
export function useViewer(): number {
  return useMe()?.id ?? 0
}

/** Takes over a session that has just begun: what the person before saw is forgotten first. */
export function useBeginSession() {
  const queryClient = useQueryClient()
  return (session: SessionState) => {
    // What a one-time link was for stays: its screen still stands, and would ask for the used link again.
    queryClient.removeQueries({ predicate: (query) => query.queryKey[0] !== keys.links[0] })
    queryClient.setQueryData(keys.session, session)
  }
}

export function useSignIn() {
  const begin = useBeginSession()
  return useMutation({
    mutationFn: (body: { email: string; password: string }) => call(signIn, { body }),
    onSuccess: begin,
  })
}

function useEndSession() {
  const queryClient = useQueryClient()
  return () => {
    keepBrowserChoices()
    const before = queryClient.getQueryData<SessionState>(keys.session)
    queryClient.clear()
    queryClient.setQueryData<SessionState>(keys.session, { me: null, demonstration: before?.demonstration ?? null })
    return queryClient.invalidateQueries({ queryKey: keys.session })
  }
}

export function useSignOut() {
  const end = useEndSession()
  return useMutation({ mutationFn: () => call(signOut, {}), onSuccess: end })
}

/** Ends every session of the person, this one too. */
export function useSignOutEverywhere() {
  const end = useEndSession()
  return useMutation({ mutationFn: () => call(signOutEverywhere, {}), onSuccess: end })
}

/** Also ends every other session of the person. */
export function useChangePassword() {
  return useMutation({
    mutationFn: (body: { current: string; next: string }) => call(changePassword, { body }),
  })
}
