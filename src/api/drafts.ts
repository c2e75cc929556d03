import { queryOptions, useMutation, useQueryClient } from '@tanstack/react-query'
import { readDraft, renewDraft } from '#shared/api/drafts.ts'
import { call } from './client.ts'
import { keys } from './keys.ts'
import { useViewer } from './session.ts'

/** The draft as the database has it, as a model document or with what it lacks. Editing goes through the socket. */
export const draftQuery = (viewer: number, code: string) =>
  queryOptions({
    queryKey: keys.draft(viewer, code),
    queryFn: ({ signal }) => call(readDraft, { params: { code }, signal }),
  })

/** Begins the draft anew from what it says; `generation` is the one that was open. */
export function useRenewDraft(code: string) {
  const queryClient = useQueryClient()
  const viewer = useViewer()
  return useMutation({
    mutationFn: (generation: number) => call(renewDraft, { params: { code }, body: { generation } }),
    onSettled: () => queryClient.invalidateQueries({ queryKey: keys.page(viewer, code) }),
  })
}
