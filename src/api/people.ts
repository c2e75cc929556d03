import { queryOptions, useMutation, useQueryClient } from '@tanstack/react-query'
import { changePerson, listPeople, makePasswordLink } from '#shared/api/people.ts'
import { call } from './client.ts'
import { keys } from './keys.ts'
import { useViewer } from './session.ts'

/** Everybody with an account; administrators only. */
export const peopleQuery = (viewer: number) =>
  queryOptions({ queryKey: keys.people(viewer), queryFn: ({ signal }) => call(listPeople, { signal }) })

export function useChangePerson() {
  const queryClient = useQueryClient()
  const viewer = useViewer()
  return useMutation({
    mutationFn: ({ person, ...body }: { person: number; administrator?: boolean; disabled?: boolean }) =>
      call(changePerson, { params: { person }, body }),
    onSuccess: () =>
      Promise.all([
        queryClient.invalidateQueries({ queryKey: keys.people(viewer) }),
        queryClient.invalidateQueries({ queryKey: keys.session }),
      ]),
  })
}

/** The answer is the link to hand over, shown once. */
export function useMakePasswordLink() {
  return useMutation({ mutationFn: (person: number) => call(makePasswordLink, { params: { person } }) })
}
