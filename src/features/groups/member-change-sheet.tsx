import type { Group, Member } from '#shared/api/groups.ts'
import type { MemberRole } from '#shared/api/roles.ts'
import { useChangeMember, useRemoveMember } from '#src/api/groups.ts'
import { Button } from '#src/components/button.tsx'
import { Dialog } from '#src/components/dialog.tsx'
import { FaultText } from '#src/components/field.tsx'
import { announce } from '#src/lib/announce.ts'
import { roleAllows, roleWord } from '#src/lib/role-words.ts'

/** `to` null: out of the group. */
export interface MemberChange {
  member: Member
  to: MemberRole | null
}

/** Says what a change of role means before it is made. */
export function MemberChangeSheet(props: { group: Group; change: MemberChange | null; onClose: () => void }) {
  const { group, change, onClose } = props
  const changeMember = useChangeMember(group.slug)
  const removeMember = useRemoveMember(group.slug)
  const error = changeMember.error ?? removeMember.error
  const close = () => {
    changeMember.reset()
    removeMember.reset()
    onClose()
  }
  const done = (said: string) => {
    announce(said)
    close()
  }
  const act = () => {
    if (!change) return
    const { member, to } = change
    const person = member.person.id
    if (to === null) removeMember.mutate({ person }, { onSuccess: () => done(`${member.person.name} removed`) })
    else {
      const said = `${member.person.name} is now ${roleWord[to].toLowerCase()}`
      changeMember.mutate({ person, role: to }, { onSuccess: () => done(said) })
    }
  }
  return (
    <Dialog
      place="side"
      open={change !== null}
      onClose={close}
      title={change ? `Changing ${change.member.person.name}` : ''}
    >
      {change && (
        <>
          <p>
            In {group.name} from <strong>{roleWord[change.member.role].toLowerCase()}</strong> to{' '}
            <strong>{change.to === null ? 'no member' : roleWord[change.to].toLowerCase()}</strong>.
          </p>
          <ul className="grid list-disc gap-1 pl-5 text-ink-2">
            {change.to === null ? (
              <>
                <li>reads no draft of this group any more, from the next request on</li>
                <li>what they wrote and signed stays in the record under their name</li>
              </>
            ) : (
              <li>{roleAllows[change.to]}</li>
            )}
            {change.to === 'maintainer' && <li>cannot approve a revision they wrote in</li>}
          </ul>
          {error && (
            <div role="alert">
              <FaultText>{error.message}</FaultText>
            </div>
          )}
          <div className="flex flex-wrap gap-2">
            <Button look="first" pending={changeMember.isPending || removeMember.isPending} onClick={act}>
              {change.to === null ? 'Remove from the group' : `Make ${roleWord[change.to].toLowerCase()}`}
            </Button>
            <Button look="quiet" onClick={close}>
              Leave as is
            </Button>
          </div>
        </>
      )}
    </Dialog>
  )
}
