import { useQuery } from '@tanstack/react-query'
import { Link } from 'react-router-dom'
import { groupsQuery } from '#src/api/groups.ts'
import { useViewer } from '#src/api/session.ts'
import { Button } from '#src/components/button.tsx'
import { Waiting } from '#src/components/pencil-line.tsx'
import { StateSheet } from '#src/components/state-sheet.tsx'
import { Cell, Row, Table, TableHead } from '#src/components/table.tsx'
import { roleWord } from '#src/lib/role-words.ts'

/** The viewer's groups; for an administrator all of them. */
export function GroupsPage() {
  const groups = useQuery(groupsQuery(useViewer()))
  return (
    <main className="grid grid-cols-[minmax(0,1fr)] content-start gap-4 px-4 py-4 tablet:px-6">
      <title>Groups · Brinkbook</title>
      <h1 className="text-title">Groups</h1>
      {groups.isPending && (
        <div className="sheet">
          <Waiting what="Reading the groups" />
        </div>
      )}
      {groups.isError && (
        <StateSheet
          urgent
          title="The library did not answer"
          acts={<Button onClick={() => groups.refetch()}>Try again now</Button>}
        >
          {groups.error.message}
        </StateSheet>
      )}
      {groups.data?.groups.length === 0 && (
        <StateSheet title="No group yet">A maintainer of a group can hand you an invitation link.</StateSheet>
      )}
      {groups.data && groups.data.groups.length > 0 && (
        <div className="sheet min-w-0">
          <Table caption="Groups">
            <TableHead columns={['Group', 'Letters', 'Models', 'People', 'You are']} />
            <tbody>
              {groups.data.groups.map((group) => (
                <Row key={group.slug}>
                  <Cell>
                    <Link
                      to={`/groups/${group.slug}`}
                      className="link inline-flex min-h-11 items-center font-[620] bench:min-h-7"
                    >
                      {group.name}
                    </Link>
                  </Cell>
                  <Cell className="figures text-note">{group.prefixes.join(', ')}</Cell>
                  <Cell className="figures text-note">{group.pageCount}</Cell>
                  <Cell className="figures text-note">{group.memberCount}</Cell>
                  <Cell>{group.role === null ? 'not a member' : roleWord[group.role].toLowerCase()}</Cell>
                </Row>
              ))}
            </tbody>
          </Table>
        </div>
      )}
    </main>
  )
}
