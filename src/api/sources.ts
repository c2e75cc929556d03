import { queryOptions, useMutation, useQueryClient } from '@tanstack/react-query'
import type { z } from 'zod'
import { addSources, linkSource, listSources, removeSource, unlinkSource } from '#shared/api/sources.ts'
import { call } from './client.ts'
import { keys } from './keys.ts'
import { useViewer } from './session.ts'

/** The sources attached to the draft (members). A revision carries its own frozen ones. */
export const sourcesQuery = (viewer: number, code: string) =>
  queryOptions({
    queryKey: keys.sources(viewer, code),
    queryFn: ({ signal }) => call(listSources, { params: { code }, signal }),
  })

function useAfterChange(code: string) {
  const queryClient = useQueryClient()
  const viewer = useViewer()
  return () =>
    Promise.all([
      queryClient.invalidateQueries({ queryKey: keys.sources(viewer, code) }),
      queryClient.invalidateQueries({ queryKey: keys.pageHead(viewer, code) }),
    ])
}

export type NewSources = z.input<typeof addSources.body>
export type NewSourceLink = z.input<typeof linkSource.body>

/** `key` from newIdempotencyKey(), the same on every try. */
export function useAddSources(code: string) {
  const after = useAfterChange(code)
  return useMutation({
    mutationFn: ({ body, key }: { body: NewSources; key: string }) =>
      call(addSources, { params: { code }, body, idempotencyKey: key }),
    onSuccess: after,
  })
}

export function useRemoveSource(code: string) {
  const after = useAfterChange(code)
  return useMutation({
    mutationFn: (source: number) => call(removeSource, { params: { code, source } }),
    onSuccess: after,
  })
}

export function useLinkSource(code: string) {
  const after = useAfterChange(code)
  return useMutation({
    mutationFn: ({ source, body, key }: { source: number; body: NewSourceLink; key: string }) =>
      call(linkSource, { params: { code, source }, body, idempotencyKey: key }),
    onSuccess: after,
  })
}

export function useUnlinkSource(code: string) {
  const after = useAfterChange(code)
  return useMutation({
    mutationFn: (link: number) => call(unlinkSource, { params: { code, link } }),
    onSuccess: after,
  })
}
