import { queryOptions, useMutation } from '@tanstack/react-query'
import {
  acceptInvitation,
  finishPasswordLink,
  finishSetup,
  readInvitation,
  readPasswordLink,
  readSetup,
} from '#shared/api/session.ts'
import { call } from './client.ts'
import { keys } from './keys.ts'
import { useBeginSession } from './session.ts'

// One-time links: what they are for, and the act that uses them up. Each act signs the person in.

export const setupQuery = (token: string) =>
  queryOptions({
    queryKey: [...keys.links, 'setup', token],
    queryFn: ({ signal }) => call(readSetup, { params: { token }, signal }),
    staleTime: Number.POSITIVE_INFINITY,
  })

export const invitationQuery = (token: string) =>
  queryOptions({
    queryKey: [...keys.links, 'invitation', token],
    queryFn: ({ signal }) => call(readInvitation, { params: { token }, signal }),
    staleTime: Number.POSITIVE_INFINITY,
  })

export const passwordLinkQuery = (token: string) =>
  queryOptions({
    queryKey: [...keys.links, 'password', token],
    queryFn: ({ signal }) => call(readPasswordLink, { params: { token }, signal }),
    staleTime: Number.POSITIVE_INFINITY,
  })

export function useFinishSetup(token: string) {
  const begin = useBeginSession()
  return useMutation({
    mutationFn: (body: { name: string; email: string; password: string }) =>
      call(finishSetup, { params: { token }, body }),
    onSuccess: begin,
  })
}

export function useAcceptInvitation(token: string) {
  const begin = useBeginSession()
  return useMutation({
    mutationFn: (body: { name?: string; password: string }) => call(acceptInvitation, { params: { token }, body }),
    onSuccess: begin,
  })
}

export function useFinishPasswordLink(token: string) {
  const begin = useBeginSession()
  return useMutation({
    mutationFn: (body: { password: string }) => call(finishPasswordLink, { params: { token }, body }),
    onSuccess: begin,
  })
}
