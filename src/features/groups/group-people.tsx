import { useState } from 'react'
import type { Group, Member } from '#shared/api/groups.ts'
import { type MemberRole, memberRoles } from '#shared/api/roles.ts'
import { useRevokeInvitation } from '#src/api/groups.ts'
import { useMe } from '#src/api/session.ts'
import { Button } from '#src/components/button.tsx'
import { FaultText } from '#src/components/field.tsx'
import { InitialsRing } from '#src/components/initials-ring.tsx'
import { RoleKey } from '#src/components/role-key.tsx'
import { Select } from '#src/components/select.tsx'
import { Cell, Row, Table, TableHead } from '#src/components/table.tsx'
import { announce } from '#src/lib/announce.ts'
import { roleOptions, roleWord } from '#src/lib/role-words.ts'
import { dayOf, momentWithOffset } from '#src/lib/times.ts'
import { type MemberChange, MemberChangeSheet } from './member-change-sheet.tsx'

/** Columns that a narrow window leaves out. */
const narrow = 'hidden tablet:table-cell'

const isRole = (value: string): value is MemberRole => memberRoles.some((role) => role === value)

/** Members with their roles, invitations that wait, and what each role allows. */
export function GroupPeople({ group }: { group: Group }) {
  const [change, setChange] = useState<MemberChange | null>(null)
  return (
    <div className="grid grid-cols-[minmax(0,1fr)] gap-4 bench:grid-cols-[minmax(0,1fr)_420px]">
      <div className="grid min-w-0 content-start gap-4">
        <div className="sheet min-w-0">
          <Table caption={`People of ${group.name}`}>
            <TableHead
              columns={[
                'Person',
                'Role',
                { label: 'Since', className: narrow },
                ...(group.mayInvite ? [{ label: 'Acts', hidden: true }] : []),
              ]}
            />
            <tbody>
              {group.members.map((member) => (
                <MemberRow key={member.person.id} member={member} mayChange={group.mayInvite} onChange={setChange} />
              ))}
            </tbody>
          </Table>
        </div>
        {group.invitations.length > 0 && <Invitations group={group} />}
      </div>
      <RoleKey />
      <MemberChangeSheet group={group} change={change} onClose={() => setChange(null)} />
    </div>
  )
}

function MemberRow(props: { member: Member; mayChange: boolean; onChange: (change: MemberChange) => void }) {
  const { member, mayChange, onChange } = props
  const { person, role, since } = member
  const own = useMe()?.id === person.id
  return (
    <Row>
      <Cell>
        <span className="flex items-center gap-3">
          <span className="hidden tablet:block">
            <InitialsRing name={person.name} own={own} />
          </span>
          <span className="min-w-0">
            <span className="block font-[620] wrap-anywhere">{person.name}</span>
            <span className="block text-note text-ink-2 wrap-anywhere">{person.email}</span>
          </span>
        </span>
      </Cell>
      <Cell className="min-w-35">
        {mayChange ? (
          <Select
            label={`Role of ${person.name}`}
            labelHidden
            options={roleOptions}
            value={role}
            onChange={(event) => {
              const next = event.target.value
              if (isRole(next) && next !== role) onChange({ member, to: next })
            }}
          />
        ) : (
          roleWord[role]
        )}
      </Cell>
      <Cell className={`whitespace-nowrap text-ink-2 ${narrow}`}>
        <time dateTime={since} title={momentWithOffset(since)}>
          {dayOf(since)}
        </time>
      </Cell>
      {mayChange && (
        <Cell className="text-right">
          <Button
            look="quiet"
            className="max-tablet:px-1"
            onClick={() => onChange({ member, to: null })}
            aria-label={`Remove ${person.name}`}
          >
            Remove
          </Button>
        </Cell>
      )}
    </Row>
  )
}

function Invitations({ group }: { group: Group }) {
  const revoke = useRevokeInvitation(group.slug)
  return (
    <section className="sheet min-w-0">
      <h2 className="px-4 pt-3 font-[680]">Invited, not here yet</h2>
      <Table caption="Invitations that wait">
        <TableHead columns={['Person', 'As', { label: 'Until', className: narrow }, { label: 'Acts', hidden: true }]} />
        <tbody>
          {group.invitations.map((invitation) => (
            <Row key={invitation.id}>
              <Cell>
                <span className="block font-[620]">{invitation.name ?? invitation.email}</span>
                <span className="block text-note text-ink-2">
                  {invitation.name !== null && `${invitation.email}, `}invited by {invitation.invitedBy}
                </span>
              </Cell>
              <Cell>{roleWord[invitation.role].toLowerCase()}</Cell>
              <Cell className={`whitespace-nowrap text-ink-2 ${narrow}`}>
                <time dateTime={invitation.expiresAt} title={momentWithOffset(invitation.expiresAt)}>
                  {dayOf(invitation.expiresAt)}
                </time>
              </Cell>
              <Cell className="text-right">
                <Button
                  look="quiet"
                  pending={revoke.isPending}
                  aria-label={`Take back the invitation of ${invitation.email}`}
                  onClick={() =>
                    revoke.mutate(
                      { invitation: invitation.id },
                      { onSuccess: () => announce(`Invitation of ${invitation.email} taken back`) },
                    )
                  }
                >
                  Take back
                </Button>
              </Cell>
            </Row>
          ))}
        </tbody>
      </Table>
      {revoke.isError && (
        <div role="alert" className="p-4">
          <FaultText>{revoke.error.message}</FaultText>
        </div>
      )}
    </section>
  )
}
