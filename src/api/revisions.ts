import { queryOptions, useMutation, useQueryClient } from '@tanstack/react-query'
import type { z } from 'zod'
import {
  approveRevision,
  listRevisions,
  readRevision,
  returnRevision,
  sendForReview,
  takeBackRevision,
  withdrawRevision,
} from '#shared/api/revisions.ts'
import { call } from './client.ts'
import { keys } from './keys.ts'
import { useViewer } from './session.ts'

/** All revisions of a page, newest first. */
export const revisionsQuery = (viewer: number, code: string) =>
  queryOptions({
    queryKey: keys.revisions(viewer, code),
    queryFn: ({ signal }) => call(listRevisions, { params: { code }, signal }),
  })

/** One revision in full, and a second one to compare it with. */
export const revisionQuery = (viewer: number, code: string, mark: string, other: string | null = null) =>
  queryOptions({
    queryKey: keys.revision(viewer, code, mark, other),
    queryFn: ({ signal }) =>
      call(readRevision, { params: { code, mark }, query: { with: other ?? undefined }, signal }),
  })

/** Every act on a revision changes the page, its lists and the reviews: all of it is read again. */
function useAfterAct(code: string) {
  const queryClient = useQueryClient()
  const viewer = useViewer()
  return async () => {
    await Promise.all(
      [keys.page(viewer, code), keys.reviews(viewer), keys.library(viewer), keys.session].map((queryKey) =>
        queryClient.invalidateQueries({ queryKey }),
      ),
    )
  }
}

/** `generation` is the one the sender saw; `key` from newIdempotencyKey(), the same on every try. */
export function useSendForReview(code: string) {
  const after = useAfterAct(code)
  return useMutation({
    mutationFn: ({ key, ...body }: { summary: string; generation: number; key: string }) =>
      call(sendForReview, { params: { code }, body, idempotencyKey: key }),
    onSuccess: after,
  })
}

/** `etag` everywhere below: the revision's as read; a revision changed since answers `changed`. */
export function useTakeBack(code: string, mark: string) {
  const after = useAfterAct(code)
  return useMutation({
    mutationFn: ({ etag }: { etag: string }) => call(takeBackRevision, { params: { code, mark }, ifMatch: etag }),
    onSuccess: after,
  })
}

export type NewRemark = z.input<typeof returnRevision.body>['remarks'][number]

export function useReturnRevision(code: string, mark: string) {
  const after = useAfterAct(code)
  return useMutation({
    mutationFn: ({ remarks, etag }: { remarks: NewRemark[]; etag: string }) =>
      call(returnRevision, { params: { code, mark }, body: { remarks }, ifMatch: etag }),
    onSuccess: after,
  })
}

export function useApproveRevision(code: string, mark: string) {
  const after = useAfterAct(code)
  return useMutation({
    mutationFn: ({ password, etag }: { password: string; etag: string }) =>
      call(approveRevision, {
        params: { code, mark },
        body: { password, equationsRead: true, verdictRead: true },
        ifMatch: etag,
      }),
    onSuccess: after,
  })
}

export function useWithdrawRevision(code: string, mark: string) {
  const after = useAfterAct(code)
  return useMutation({
    mutationFn: ({ reason, password, etag }: { reason: string; password: string; etag: string }) =>
      call(withdrawRevision, { params: { code, mark }, body: { reason, password }, ifMatch: etag }),
    onSuccess: after,
  })
}
