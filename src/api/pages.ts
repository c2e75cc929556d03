import { infiniteQueryOptions, queryOptions, useMutation, useQueryClient } from '@tanstack/react-query'
import {
  changePage,
  createPage,
  listPages,
  type OnsetKind,
  type RowState,
  readPage,
  removePage,
} from '#shared/api/pages.ts'
import type { ReadAccess } from '#shared/api/roles.ts'
import { call } from './client.ts'
import { keys } from './keys.ts'
import { useViewer } from './session.ts'

/** What narrows the library; all of it stands in the address. */
export interface LibraryFilters {
  q?: string
  onset?: OnsetKind[]
  state?: RowState[]
  group?: string[]
  sort?: 'changed' | 'code' | 'title'
}

/** Rows of the library, page after page, with the facet counts. */
export const libraryQuery = (viewer: number, filters: LibraryFilters) =>
  infiniteQueryOptions({
    queryKey: [...keys.library(viewer), filters] as const,
    queryFn: ({ signal, pageParam }) =>
      call(listPages, { query: { ...filters, cursor: pageParam ?? undefined, limit: 50 }, signal }),
    initialPageParam: null as string | null,
    getNextPageParam: (last) => last.next,
    // The old rows stay in sight while the new ones come.
    placeholderData: (before) => before,
  })

/** The head of a page: title block, state, and what the viewer may do there. */
export const pageQuery = (viewer: number, code: string) =>
  queryOptions({
    queryKey: keys.pageHead(viewer, code),
    queryFn: ({ signal }) => call(readPage, { params: { code }, signal }),
  })

export interface NewPage {
  group: string
  prefix: string
  title: string
  summary?: string
  field?: string
  /** A model document to begin with. */
  document?: unknown
  /** From newIdempotencyKey(): the same on every try, so that a lost answer makes no second page. */
  key: string
}

export function useCreatePage() {
  const queryClient = useQueryClient()
  const viewer = useViewer()
  return useMutation({
    mutationFn: ({ group, key, ...body }: NewPage) =>
      call(createPage, { params: { group }, body, idempotencyKey: key }),
    onSuccess: () => queryClient.invalidateQueries({ queryKey: keys.library(viewer) }),
  })
}

/** Who may read the page beyond its group. `etag` is the page's as read. */
export function useChangePage(code: string) {
  const queryClient = useQueryClient()
  const viewer = useViewer()
  return useMutation({
    mutationFn: ({ access, etag }: { access: ReadAccess; etag: string }) =>
      call(changePage, { params: { code }, body: { access }, ifMatch: etag }),
    onSuccess: (page) => {
      queryClient.setQueryData(pageQuery(viewer, code).queryKey, page)
      return queryClient.invalidateQueries({ queryKey: keys.library(viewer) })
    },
  })
}

/** Only a page that never had a revision sent. */
export function useRemovePage(code: string) {
  const queryClient = useQueryClient()
  const viewer = useViewer()
  return useMutation({
    mutationFn: ({ etag }: { etag: string }) => call(removePage, { params: { code }, ifMatch: etag }),
    onSuccess: () => {
      queryClient.removeQueries({ queryKey: keys.page(viewer, code) })
      return queryClient.invalidateQueries({ queryKey: keys.library(viewer) })
    },
  })
}
