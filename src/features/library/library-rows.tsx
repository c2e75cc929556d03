import type { InfiniteData, UseInfiniteQueryResult } from '@tanstack/react-query'
import type { PageRow } from '#shared/api/pages.ts'
import { Button, ButtonLink } from '#src/components/button.tsx'
import { ModelRow, ModelRowHead } from '#src/components/model-row.tsx'
import { OnsetGlyph } from '#src/components/onset-glyph.tsx'
import { Waiting } from '#src/components/pencil-line.tsx'
import { StateSheet } from '#src/components/state-sheet.tsx'

export interface LibraryRowsProps {
  library: UseInfiniteQueryResult<InfiniteData<{ pages: PageRow[]; total: number }>>
  narrowed: boolean
  mayWrite: boolean
  signedIn: boolean
  onClear: () => void
}

/** The rows in their four states: waiting, failed, empty (of two kinds) and full. */
export function LibraryRows({ library, narrowed, mayWrite, signedIn, onClear }: LibraryRowsProps) {
  if (library.isPending)
    return (
      <div className="sheet">
        <Waiting what="Reading the library" />
      </div>
    )
  if (library.isError) {
    return (
      <StateSheet
        urgent
        title="The library did not answer"
        acts={<Button onClick={() => library.refetch()}>Try again now</Button>}
      >
        {library.error.message}
      </StateSheet>
    )
  }
  const rows = library.data.pages.flatMap((page) => page.pages)
  if (rows.length === 0 && narrowed) {
    return (
      <StateSheet title="No model matches" acts={<Button onClick={onClear}>Clear search and filters</Button>}>
        Search looks in codes, names, symbols, the meanings of parameters and sources. Fewer ticks or a shorter word
        find more.
      </StateSheet>
    )
  }
  if (rows.length === 0) return <NoModels mayWrite={mayWrite} signedIn={signedIn} />
  return (
    <div
      className={`sheet min-w-0 ${library.isPlaceholderData ? 'opacity-60' : ''}`}
      aria-busy={library.isPlaceholderData}
    >
      <ModelRowHead />
      <ul aria-label="Models">
        {rows.map((row) => (
          <ModelRow key={row.code} row={row} />
        ))}
      </ul>
      {library.hasNextPage && (
        <p className="border-t border-rule p-3">
          <Button pending={library.isFetchingNextPage} onClick={() => library.fetchNextPage()}>
            Show more
          </Button>
        </p>
      )}
    </div>
  )
}

function NoModels({ mayWrite, signedIn }: { mayWrite: boolean; signedIn: boolean }) {
  return (
    <StateSheet
      picture={<OnsetGlyph kind="none" size={40} faded />}
      title="No models yet"
      acts={
        mayWrite ? (
          <ButtonLink to="/new" look="first">
            New model
          </ButtonLink>
        ) : !signedIn ? (
          <ButtonLink to="/sign-in" look="first">
            Sign in
          </ButtonLink>
        ) : null
      }
    >
      {mayWrite
        ? 'Start with an equation block, or bring in a model document someone sent you.'
        : signedIn
          ? 'No page is in force that you may read. A group you are a member of shows its pages here.'
          : 'No page is open to everybody. Sign in to see the pages of your groups.'}
    </StateSheet>
  )
}
