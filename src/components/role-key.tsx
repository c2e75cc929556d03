import { mayInGroup, mayInPage, memberRoles } from '#shared/api/roles.ts'
import { roleWord } from '#src/lib/role-words.ts'
import { Cell, Row, Table, TableHead } from './table.tsx'

// Read off the policy itself, so that this table cannot say anything else than the server does.
const acts = [
  { label: 'read drafts', may: (role: (typeof memberRoles)[number]) => mayInPage('draft:read', role, 'draft') },
  { label: 'edit, send', may: (role: (typeof memberRoles)[number]) => mayInPage('revision:send', role, 'draft') },
  { label: 'approve', may: (role: (typeof memberRoles)[number]) => mayInPage('revision:approve', role, 'in-review') },
  { label: 'people', may: (role: (typeof memberRoles)[number]) => mayInGroup('member:change', role) },
]

/** What each role allows, once, as a key beside every list of people. */
export function RoleKey() {
  return (
    <section className="sheet min-w-0 self-start">
      <h2 className="px-4 pt-3 font-[680]">What a role allows</h2>
      <Table caption="What a role allows">
        <TableHead
          columns={[
            { label: 'Role', hidden: true },
            ...acts.map((act) => ({ label: act.label, className: 'text-center' })),
          ]}
        />
        <tbody>
          {memberRoles.map((role) => (
            <Row key={role}>
              <th scope="row" className="px-2.5 py-2 text-left font-[400] tablet:px-4">
                {roleWord[role]}
              </th>
              {acts.map((act) => (
                <Cell key={act.label} className="text-center">
                  <span aria-hidden>{act.may(role) ? '●' : '–'}</span>
                  <span className="sr-only">{act.may(role) ? 'yes' : 'no'}</span>
                </Cell>
              ))}
            </Row>
          ))}
        </tbody>
      </Table>
      <p className="border-t border-rule px-4 py-3 text-note text-ink-2">
        Nobody approves what they wrote in. An administrator appoints, but reads no page and approves nothing by being
        one. The last maintainer of a group cannot be removed.
      </p>
    </section>
  )
}
