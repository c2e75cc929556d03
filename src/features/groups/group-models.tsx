import { useInfiniteQuery } from '@tanstack/react-query'
import { Link } from 'react-router-dom'
import type { Group } from '#shared/api/groups.ts'
import type { PageRow } from '#shared/api/pages.ts'
import { libraryQuery } from '#src/api/pages.ts'
import { useMe, useViewer } from '#src/api/session.ts'
import { Button } from '#src/components/button.tsx'
import { InitialsRing } from '#src/components/initials-ring.tsx'
import { ModelRow, ModelRowHead } from '#src/components/model-row.tsx'
import { Waiting } from '#src/components/pencil-line.tsx'
import { StateSheet } from '#src/components/state-sheet.tsx'
import { standsOnGround } from '#src/lib/onset-figures.ts'
import { roleWord } from '#src/lib/role-words.ts'

/** Rows that run where their own model is not steady. */
const offGround = (rows: readonly PageRow[]) => rows.filter((row) => row.card !== null && !standsOnGround(row.card))

/** The group's pages as rows, those that run off their ground named first, and its people beside them. */
export function GroupModels({ group }: { group: Group }) {
  const library = useInfiniteQuery(libraryQuery(useViewer(), { group: [group.slug] }))
  const me = useMe()
  const rows = library.data?.pages.flatMap((page) => page.pages) ?? []
  const off = offGround(rows)
  return (
    <div className="grid grid-cols-[minmax(0,1fr)] gap-4 bench:grid-cols-[minmax(0,1fr)_320px]">
      <div className="grid min-w-0 content-start gap-4">
        {library.isPending && (
          <div className="sheet">
            <Waiting what="Reading the models" />
          </div>
        )}
        {library.isError && (
          <StateSheet
            urgent
            title="The library did not answer"
            acts={<Button onClick={() => library.refetch()}>Try again now</Button>}
          >
            {library.error.message}
          </StateSheet>
        )}
        {off.length > 0 && (
          <section className="sheet grid gap-1 p-5">
            <h2 className="text-subtitle">
              {off.length === 1 ? '1 running point is not on ground' : `${off.length} running points are not on ground`}
            </h2>
            <p className="text-ink-2">
              {off.map((row) => row.code).join(', ')}: the model is not steady at the value its page runs at.
            </p>
          </section>
        )}
        {library.isSuccess && rows.length === 0 && (
          <StateSheet title="No models yet">
            {group.role === null
              ? 'No page of this group is in force that you may read.'
              : 'A contributor or maintainer of the group makes the first page.'}
          </StateSheet>
        )}
        {rows.length > 0 && (
          <div className="sheet min-w-0">
            <ModelRowHead beside />
            <ul aria-label={`Models of ${group.name}`}>
              {rows.map((row) => (
                <ModelRow key={row.code} row={row} showGroup={false} beside />
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
        )}
      </div>
      <section aria-label="People" className="sheet self-start">
        <h2 className="flex items-baseline justify-between border-b border-rule px-4 py-3 font-[680]">
          People <span className="text-note font-[400] text-ink-2">{group.memberCount}</span>
        </h2>
        <ul>
          {group.members.slice(0, 6).map((member) => (
            <li key={member.person.id} className="flex items-center gap-3 border-b border-rule px-4 py-2">
              <InitialsRing name={member.person.name} own={member.person.id === me?.id} />
              <span className="min-w-0">
                <span className="block font-[560] wrap-anywhere">{member.person.name}</span>
                <span className="block text-note text-ink-2">{roleWord[member.role].toLowerCase()}</span>
              </span>
            </li>
          ))}
        </ul>
        <p className="px-4 py-2.5">
          <Link to={`/groups/${group.slug}/people`} className="link inline-flex min-h-11 items-center bench:min-h-6">
            {group.members.length > 6 ? `All ${group.members.length}` : 'Roles and invitations'}
          </Link>
        </p>
      </section>
    </div>
  )
}
