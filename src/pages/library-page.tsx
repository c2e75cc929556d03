import { useInfiniteQuery } from '@tanstack/react-query'
import { Plus, SlidersHorizontal } from 'lucide-react'
import { useEffect, useState } from 'react'
import { useSearchParams } from 'react-router-dom'
import { type LibraryFilters, libraryQuery } from '#src/api/pages.ts'
import { useMe, useViewer } from '#src/api/session.ts'
import { Button, ButtonLink } from '#src/components/button.tsx'
import { Dialog } from '#src/components/dialog.tsx'
import { filtersOf, searchOf } from '#src/features/library/library-address.ts'
import { LibraryFacets } from '#src/features/library/library-facets.tsx'
import { LibraryRows } from '#src/features/library/library-rows.tsx'
import { LibrarySearch } from '#src/features/library/library-search.tsx'
import { SortSelect } from '#src/features/library/sort-select.tsx'
import { announce } from '#src/lib/announce.ts'

const counted = (count: number, one: string, many: string) => `${count} ${count === 1 ? one : many}`

/** The shared collection: list, search, facets. All choices stand in the address. */
export function LibraryPage() {
  const [search, setSearch] = useSearchParams()
  const filters = filtersOf(search)
  const viewer = useViewer()
  const mayWrite = useMe()?.groups.some((group) => group.role !== 'reader') ?? false
  const library = useInfiniteQuery(libraryQuery(viewer, filters))
  const [drawer, setDrawer] = useState(false)

  const change = (next: LibraryFilters) => setSearch(searchOf(next), { replace: true })
  const first = library.data?.pages[0]
  const narrowed = [filters.onset, filters.state, filters.group].filter(Boolean).length
  const groupCount = first?.facets.group.filter((group) => group.count > 0).length ?? 0
  const summary = first && `${counted(first.total, 'model', 'models')} in ${counted(groupCount, 'group', 'groups')}`
  useEffect(() => {
    if (summary !== undefined && !library.isPlaceholderData) announce(summary)
  }, [summary, library.isPlaceholderData])

  const facets = <LibraryFacets filters={filters} counts={first?.facets} onChange={change} />
  return (
    <main className="grid grid-cols-[minmax(0,1fr)] content-start gap-x-7 gap-y-3 px-4 py-4 tablet:px-6 bench:grid-cols-[212px_minmax(0,1fr)]">
      <title>Library · Brinkbook</title>
      <div className="hidden gap-5 bench:grid bench:content-start">
        <div>
          <h1 className="text-title">Library</h1>
          <p className="text-ink-2">{summary ?? ' '}</p>
        </div>
        {facets}
      </div>
      <div className="grid min-w-0 content-start gap-3">
        <h1 className="text-title bench:hidden">Library</h1>
        <div className="flex flex-wrap items-center gap-3">
          <LibrarySearch q={filters.q ?? ''} onChange={(q) => change({ ...filters, q })} />
          <span className="hidden bench:block">
            <SortSelect value={filters.sort ?? 'changed'} onChange={(sort) => change({ ...filters, sort })} />
          </span>
          <Button
            className="bench:hidden"
            icon={<SlidersHorizontal aria-hidden className="size-4" />}
            onClick={() => setDrawer(true)}
          >
            {narrowed > 0 ? `Filters: ${narrowed}` : 'Filters'}
          </Button>
          {mayWrite && (
            <ButtonLink
              to="/new"
              look="first"
              icon={<Plus aria-hidden className="size-4" />}
              className="bench:min-h-10"
            >
              New model
            </ButtonLink>
          )}
        </div>
        <div className="flex flex-wrap items-center justify-between gap-3 bench:hidden">
          <p className="text-ink-2">{summary ?? ' '}</p>
          <SortSelect value={filters.sort ?? 'changed'} onChange={(sort) => change({ ...filters, sort })} />
        </div>
        <LibraryRows
          library={library}
          narrowed={narrowed > 0 || filters.q !== undefined}
          mayWrite={mayWrite}
          signedIn={viewer !== 0}
          onClear={() => change({ sort: filters.sort })}
        />
      </div>
      <Dialog title="Filters" open={drawer} onClose={() => setDrawer(false)} place="side">
        {facets}
        <div className="flex gap-2">
          <Button look="first" onClick={() => setDrawer(false)}>
            {first ? `Show ${counted(first.total, 'model', 'models')}` : 'Show'}
          </Button>
          {narrowed > 0 && (
            <Button look="quiet" onClick={() => change({ q: filters.q, sort: filters.sort })}>
              Clear
            </Button>
          )}
        </div>
      </Dialog>
    </main>
  )
}
