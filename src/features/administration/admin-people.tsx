import { useQuery } from '@tanstack/react-query'
import { useState } from 'react'
import { Link } from 'react-router-dom'
import type { Person } from '#shared/api/people.ts'
import { peopleQuery } from '#src/api/people.ts'
import { useMe, useViewer } from '#src/api/session.ts'
import { Button } from '#src/components/button.tsx'
import { InitialsRing } from '#src/components/initials-ring.tsx'
import { Menu, MenuAct } from '#src/components/menu.tsx'
import { Waiting } from '#src/components/pencil-line.tsx'
import { RoleKey } from '#src/components/role-key.tsx'
import { StateSheet } from '#src/components/state-sheet.tsx'
import { Cell, Row, Table, TableHead } from '#src/components/table.tsx'
import { roleWord } from '#src/lib/role-words.ts'
import { dayOf, momentWithOffset } from '#src/lib/times.ts'
import { type PersonAct, PersonActSheet } from './person-act-sheet.tsx'

/** Everybody with an account, one row each with all their memberships. */
export function AdminPeople() {
  const people = useQuery(peopleQuery(useViewer()))
  const [act, setAct] = useState<PersonAct | null>(null)
  if (people.isPending) {
    return (
      <div className="sheet">
        <Waiting what="Reading the people" />
      </div>
    )
  }
  if (people.isError) {
    return (
      <StateSheet
        urgent
        title="The library did not answer"
        acts={<Button onClick={() => people.refetch()}>Try again now</Button>}
      >
        {people.error.message}
      </StateSheet>
    )
  }
  return (
    <div className="grid grid-cols-[minmax(0,1fr)] gap-4 bench:grid-cols-[minmax(0,1fr)_420px]">
      <div className="sheet min-w-0 self-start">
        <Table caption="People">
          <TableHead
            columns={[
              'Person',
              'Member of',
              { label: 'Last signed in', className: 'hidden tablet:table-cell' },
              { label: 'Acts', hidden: true },
            ]}
          />
          <tbody>
            {people.data.people.map((person) => (
              <PersonRow key={person.id} person={person} onAct={(kind) => setAct({ person, kind })} />
            ))}
          </tbody>
        </Table>
      </div>
      <div className="grid content-start gap-4">
        <RoleKey />
        <p className="px-4 text-note text-ink-2">
          Roles are given in each group, by its maintainers or by an administrator. People join a group by its
          invitation link.
        </p>
      </div>
      <PersonActSheet act={act} onClose={() => setAct(null)} />
    </div>
  )
}

function PersonRow({ person, onAct }: { person: Person; onAct: (kind: PersonAct['kind']) => void }) {
  const own = useMe()?.id === person.id
  return (
    <Row className={person.disabled ? 'text-ink-3' : undefined}>
      <Cell>
        <span className="flex items-center gap-3">
          <span className="hidden tablet:block">
            <InitialsRing name={person.name} own={own} />
          </span>
          <span className="min-w-0">
            <span className="block font-[620] wrap-anywhere">{person.name}</span>
            <span className="block text-note text-ink-2 wrap-anywhere">{person.email}</span>
            {(person.administrator || person.disabled) && (
              <span className="block text-note font-[620]">
                {[person.administrator && 'administrator', person.disabled && 'disabled'].filter(Boolean).join(', ')}
              </span>
            )}
          </span>
        </span>
      </Cell>
      <Cell>
        <ul>
          {person.groups.map((group) => (
            <li key={group.slug}>
              <Link to={`/groups/${group.slug}/people`} className="link inline-flex min-h-6 items-center">
                {group.name}
              </Link>
              , {roleWord[group.role].toLowerCase()}
            </li>
          ))}
          {person.groups.length === 0 && <li className="text-ink-2">no group</li>}
        </ul>
      </Cell>
      <Cell className="hidden whitespace-nowrap text-ink-2 tablet:table-cell">
        {person.lastSignIn === null ? (
          'never'
        ) : (
          <time dateTime={person.lastSignIn} title={momentWithOffset(person.lastSignIn)}>
            {dayOf(person.lastSignIn)}
          </time>
        )}
      </Cell>
      <Cell className="text-right">
        <Menu label={`Acts for ${person.name}`} trigger={<Button aria-label={`Change ${person.name}`}>Change</Button>}>
          <MenuAct onSelect={() => onAct('password-link')}>New-password link</MenuAct>
          <MenuAct onSelect={() => onAct(person.administrator ? 'no-administrator' : 'administrator')}>
            {person.administrator ? 'Take the administrator role' : 'Make administrator'}
          </MenuAct>
          <MenuAct onSelect={() => onAct(person.disabled ? 'enable' : 'disable')}>
            {person.disabled ? 'Enable the account' : 'Disable the account'}
          </MenuAct>
        </Menu>
      </Cell>
    </Row>
  )
}
