import type { Person } from '#shared/api/people.ts'
import { useChangePerson, useMakePasswordLink } from '#src/api/people.ts'
import { Button } from '#src/components/button.tsx'
import { Dialog } from '#src/components/dialog.tsx'
import { FaultText } from '#src/components/field.tsx'
import { HandedLink } from '#src/components/handed-link.tsx'
import { announce } from '#src/lib/announce.ts'

export interface PersonAct {
  person: Person
  kind: 'administrator' | 'no-administrator' | 'disable' | 'enable' | 'password-link'
}

const words: Record<PersonAct['kind'], { button: string; said: string; means: string[] }> = {
  administrator: {
    button: 'Make administrator',
    said: 'is now an administrator',
    means: ['lays out groups, appoints and disables people', 'reads no page and approves nothing by it'],
  },
  'no-administrator': {
    button: 'Take the administrator role',
    said: 'is no longer an administrator',
    means: ['keeps every role in groups', 'the last administrator cannot lose the role'],
  },
  disable: {
    button: 'Disable the account',
    said: 'is disabled',
    means: [
      'is signed out everywhere at once, also where they are editing now',
      'cannot sign in; what they wrote and signed stays under their name',
      'can be enabled again',
    ],
  },
  enable: { button: 'Enable the account', said: 'is enabled', means: ['can sign in again, with every role as before'] },
  'password-link': {
    button: 'Make the link',
    said: 'has a new-password link',
    means: [
      'whoever opens it sets the password and is signed in: hand it over in person',
      'ends their open sessions when used',
    ],
  },
}

/** Says what an act on a person means before it is done; shows the link it makes. */
export function PersonActSheet({ act, onClose }: { act: PersonAct | null; onClose: () => void }) {
  const change = useChangePerson()
  const makeLink = useMakePasswordLink()
  const error = change.error ?? makeLink.error
  const close = () => {
    change.reset()
    makeLink.reset()
    onClose()
  }
  const run = () => {
    if (!act) return
    const { person, kind } = act
    const onSuccess = () => announce(`${person.name} ${words[kind].said}`)
    if (kind === 'password-link') makeLink.mutate(person.id, { onSuccess })
    else {
      const field =
        kind === 'disable' || kind === 'enable'
          ? { disabled: kind === 'disable' }
          : { administrator: kind === 'administrator' }
      change.mutate(
        { person: person.id, ...field },
        {
          onSuccess: () => {
            onSuccess()
            close()
          },
        },
      )
    }
  }
  return (
    <Dialog place="side" open={act !== null} onClose={close} title={act ? `Changing ${act.person.name}` : ''}>
      {act && makeLink.isSuccess && (
        <>
          <HandedLink label="New-password link" link={makeLink.data.link} expiresAt={makeLink.data.expiresAt} />
          <Button look="first" onClick={close} className="justify-self-start">
            Done
          </Button>
        </>
      )}
      {act && !makeLink.isSuccess && (
        <>
          <ul className="grid list-disc gap-1 pl-5 text-ink-2">
            {words[act.kind].means.map((line) => (
              <li key={line}>{line}</li>
            ))}
          </ul>
          {error && (
            <div role="alert">
              <FaultText>{error.message}</FaultText>
            </div>
          )}
          <div className="flex flex-wrap gap-2">
            <Button look="first" pending={change.isPending || makeLink.isPending} onClick={run}>
              {words[act.kind].button}
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
