import { zodResolver } from '@hookform/resolvers/zod'
import { useForm, useWatch } from 'react-hook-form'
import { type Group, invite } from '#shared/api/groups.ts'
import { fieldFault, generalFault } from '#src/api/api-problem.ts'
import { useInvite } from '#src/api/groups.ts'
import { Button } from '#src/components/button.tsx'
import { Dialog } from '#src/components/dialog.tsx'
import { FaultText, Field } from '#src/components/field.tsx'
import { HandedLink } from '#src/components/handed-link.tsx'
import { Select } from '#src/components/select.tsx'
import { useActKey } from '#src/hooks/use-act-key.ts'
import { announce } from '#src/lib/announce.ts'
import { roleAllows, roleOptions } from '#src/lib/role-words.ts'

/** Makes an invitation and shows its link, once. */
export function GroupInvite({ group, open, onClose }: { group: Group; open: boolean; onClose: () => void }) {
  return (
    <Dialog place="side" title={`Invite someone to ${group.name}`} open={open} onClose={onClose}>
      <InviteForm group={group} onDone={onClose} />
    </Dialog>
  )
}

function InviteForm({ group, onDone }: { group: Group; onDone: () => void }) {
  const send = useInvite(group.slug)
  const keyOf = useActKey()
  const { register, handleSubmit, formState, control } = useForm({
    resolver: zodResolver(invite.body),
    defaultValues: { email: '', name: undefined, role: 'reader' as const },
  })
  const role = useWatch({ control, name: 'role' })
  const submit = handleSubmit((body) =>
    send.mutate({ ...body, key: keyOf(body) }, { onSuccess: () => announce('Invitation made') }),
  )

  const general = generalFault(send.error, 'email', 'name')
  if (send.isSuccess) {
    return (
      <>
        <HandedLink label="Invitation link" link={send.data.link} expiresAt={send.data.expiresAt} />
        <Button look="first" onClick={onDone} className="justify-self-start">
          Done
        </Button>
      </>
    )
  }
  return (
    <form onSubmit={submit} noValidate className="grid gap-3">
      <Field
        label="E-mail"
        type="email"
        error={formState.errors.email?.message ?? fieldFault(send.error, 'email')}
        {...register('email')}
      />
      <Field
        label="Name (can be left empty)"
        error={formState.errors.name?.message ?? fieldFault(send.error, 'name')}
        {...register('name', { setValueAs: (value: unknown) => (value === '' ? undefined : value) })}
      />
      <Select label="As" options={roleOptions} hint={roleAllows[role]} {...register('role')} />
      {general !== null && (
        <div role="alert">
          <FaultText>{general}</FaultText>
        </div>
      )}
      <Button type="submit" look="first" pending={send.isPending} className="mt-1 justify-self-start">
        Make the invitation link
      </Button>
    </form>
  )
}
