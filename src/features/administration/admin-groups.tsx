import { useQuery } from '@tanstack/react-query'
import { Link } from 'react-router-dom'
import { groupsQuery } from '#src/api/groups.ts'
import { useViewer } from '#src/api/session.ts'
import { Button } from '#src/components/button.tsx'
import { Waiting } from '#src/components/pencil-line.tsx'
import { StateSheet } from '#src/components/state-sheet.tsx'
import { Cell, Row, Table, TableHead } from '#src/components/table.tsx'

/** All groups, with the letters their page codes begin with. */
export function AdminGroups({ onNew }: { onNew: () => void }) {
  const groups = useQuery(groupsQuery(useViewer()))
  if (groups.isPending) {
    return (
      <div className="sheet">
        <Waiting what="Reading the groups" />
      </div>
    )
  }
  if (groups.isError) {
    return (
      <StateSheet
        urgent
        title="The library did not answer"
        acts={<Button onClick={() => groups.refetch()}>Try again now</Button>}
      >
        {groups.error.message}
      </StateSheet>
    )
  }
  if (groups.data.groups.length === 0) {
    return (
      <StateSheet
        title="Which groups keep models here?"
        acts={
          <Button look="first" onClick={onNew}>
            New group
          </Button>
        }
      >
        A group owns its pages: its maintainers approve them, its contributors write them. One is enough to begin; more
        can follow.
      </StateSheet>
    )
  }
  return (
    <div className="sheet min-w-0">
      <Table caption="Groups">
        <TableHead columns={['Group', 'Letters for page codes', 'Models', 'People']} />
        <tbody>
          {groups.data.groups.map((group) => (
            <Row key={group.slug}>
              <Cell>
                <Link
                  to={`/groups/${group.slug}/people`}
                  className="link inline-flex min-h-11 items-center font-[620] bench:min-h-7"
                >
                  {group.name}
                </Link>
              </Cell>
              <Cell className="figures text-note">{group.prefixes.join(', ')}</Cell>
              <Cell className="figures text-note">{group.pageCount}</Cell>
              <Cell className="figures text-note">{group.memberCount}</Cell>
            </Row>
          ))}
        </tbody>
      </Table>
    </div>
  )
}
