import { queryOptions } from '@tanstack/react-query'
import { readDraft } from '#shared/api/drafts.ts'
import { call } from './client.ts'
import { keys } from './keys.ts'

/** The draft as the database has it, as a model document or with what it lacks. Editing goes through the socket. */
export const draftQuery = (viewer: number, code: string) =>
  queryOptions({
    queryKey: keys.draft(viewer, code),
    queryFn: ({ signal }) => call(readDraft, { params: { code }, signal }),
  })
