import { queryOptions, useMutation, useQueryClient } from '@tanstack/react-query'
import {
  changeMember,
  createGroup,
  type Group,
  invite,
  listGroups,
  readGroup,
  removeMember,
  revokeInvitation,
} from '#shared/api/groups.ts'
import type { MemberRole } from '#shared/api/roles.ts'
import { call } from './client.ts'
import { keys } from './keys.ts'
import { useViewer } from './session.ts'

/** Own groups; for an administrator all of them. */
export const groupsQuery = (viewer: number) =>
  queryOptions({ queryKey: keys.groups(viewer), queryFn: ({ signal }) => call(listGroups, { signal }) })

export const groupQuery = (viewer: number, group: string) =>
  queryOptions({
    queryKey: keys.group(viewer, group),
    queryFn: ({ signal }) => call(readGroup, { params: { group }, signal }),
  })

/** `key` from newIdempotencyKey(), the same on every try. The answer holds the first maintainer's invitation link, shown once. */
export function useCreateGroup() {
  const queryClient = useQueryClient()
  const viewer = useViewer()
  return useMutation({
    mutationFn: ({ key, ...body }: { name: string; prefixes: string[]; maintainerEmail: string; key: string }) =>
      call(createGroup, { body, idempotencyKey: key }),
    onSuccess: () => queryClient.invalidateQueries({ queryKey: keys.groups(viewer) }),
  })
}

function useTakeGroup(group: string) {
  const queryClient = useQueryClient()
  const viewer = useViewer()
  return async (answer: Group) => {
    queryClient.setQueryData(groupQuery(viewer, group).queryKey, answer)
    // The viewer's own role may be among what changed.
    await Promise.all([
      queryClient.invalidateQueries({ queryKey: keys.session }),
      queryClient.invalidateQueries({ queryKey: keys.groups(viewer) }),
      queryClient.invalidateQueries({ queryKey: keys.people(viewer) }),
    ])
  }
}

export function useChangeMember(group: string) {
  const take = useTakeGroup(group)
  return useMutation({
    mutationFn: ({ person, role }: { person: number; role: MemberRole }) =>
      call(changeMember, { params: { group, person }, body: { role } }),
    onSuccess: take,
  })
}

export function useRemoveMember(group: string) {
  const take = useTakeGroup(group)
  return useMutation({
    mutationFn: ({ person }: { person: number }) => call(removeMember, { params: { group, person } }),
    onSuccess: take,
  })
}

/** The answer is the link to hand over, shown once. */
export function useInvite(group: string) {
  const queryClient = useQueryClient()
  const viewer = useViewer()
  return useMutation({
    mutationFn: ({ key, ...body }: { email: string; name?: string; role: MemberRole; key: string }) =>
      call(invite, { params: { group }, body, idempotencyKey: key }),
    onSuccess: () => queryClient.invalidateQueries({ queryKey: keys.group(viewer, group) }),
  })
}

export function useRevokeInvitation(group: string) {
  const queryClient = useQueryClient()
  const viewer = useViewer()
  return useMutation({
    mutationFn: ({ invitation }: { invitation: number }) => call(revokeInvitation, { params: { group, invitation } }),
    onSuccess: () => queryClient.invalidateQueries({ queryKey: keys.group(viewer, group) }),
  })
}
