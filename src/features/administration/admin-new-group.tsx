import { type FormEvent, useState } from 'react'
import { createGroup } from '#shared/api/groups.ts'
import { fieldFault, generalFault } from '#src/api/api-problem.ts'
import { useCreateGroup } from '#src/api/groups.ts'
import { Button } from '#src/components/button.tsx'
import { Dialog } from '#src/components/dialog.tsx'
import { FaultText, Field } from '#src/components/field.tsx'
import { HandedLink } from '#src/components/handed-link.tsx'
import { useActKey } from '#src/hooks/use-act-key.ts'
import { announce } from '#src/lib/announce.ts'
import { prefixesOf } from '#src/lib/prefixes.ts'

/** Lays a group: its name, the letters of its page codes, and its first maintainer, who gets an invitation link. */
export function AdminNewGroup({ open, onClose }: { open: boolean; onClose: () => void }) {
  return (
    <Dialog place="side" title="New group" open={open} onClose={onClose}>
      <NewGroupForm onDone={onClose} />
    </Dialog>
  )
}

function NewGroupForm({ onDone }: { onDone: () => void }) {
  const create = useCreateGroup()
  const keyOf = useActKey()
  const [name, setName] = useState('')
  const [letters, setLetters] = useState('')
  const [maintainerEmail, setMaintainerEmail] = useState('')
  const [checked, setChecked] = useState(false)

  const parsed = createGroup.body.safeParse({ name, prefixes: prefixesOf(letters), maintainerEmail })
  const fault = (field: string) =>
    checked && !parsed.success ? (parsed.error.issues.find((issue) => issue.path[0] === field)?.message ?? null) : null
  const taken = parsed.success
    ? parsed.data.prefixes.map((_, index) => fieldFault(create.error, `prefixes.${index}`))
    : []
  const letterFault = taken.find((message) => message !== null) ?? null
  const general = letterFault === null ? generalFault(create.error, 'name', 'maintainerEmail') : null
  const submit = (event: FormEvent) => {
    event.preventDefault()
    setChecked(true)
    if (parsed.success)
      create.mutate({ ...parsed.data, key: keyOf(parsed.data) }, { onSuccess: () => announce('Group laid') })
  }

  if (create.isSuccess) {
    const { group, invitation } = create.data
    return (
      <>
        <p>
          {group.name} is laid. Its first maintainer, {maintainerEmail.trim()}, joins by this link.
        </p>
        <HandedLink label="Invitation link of the maintainer" link={invitation.link} expiresAt={invitation.expiresAt} />
        <Button look="first" onClick={onDone} className="justify-self-start">
          Done
        </Button>
      </>
    )
  }
  return (
    <form onSubmit={submit} noValidate className="grid gap-3">
      <Field label="Name" value={name} error={fault('name')} onChange={(event) => setName(event.target.value)} />
      <Field
        label="Letters for page codes"
        figures
        autoCapitalize="characters"
        spellCheck={false}
        value={letters}
        hint="Two to four capitals each, such as RUN, SHM. They belong to this group for good."
        error={fault('prefixes') ?? letterFault}
        onChange={(event) => setLetters(event.target.value)}
      />
      <Field
        label="First maintainer, e-mail"
        type="email"
        value={maintainerEmail}
        error={fault('maintainerEmail')}
        onChange={(event) => setMaintainerEmail(event.target.value)}
      />
      {general !== null && (
        <div role="alert">
          <FaultText>{general}</FaultText>
        </div>
      )}
      <Button type="submit" look="first" pending={create.isPending} className="mt-1 justify-self-start">
        Lay the group
      </Button>
    </form>
  )
}
