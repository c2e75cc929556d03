import { zodResolver } from '@hookform/resolvers/zod'
import { useForm } from 'react-hook-form'
import { changePassword } from '#shared/api/session.ts'
import { ApiProblem, fieldFault, generalFault } from '#src/api/api-problem.ts'
import { useChangePassword, useMe } from '#src/api/session.ts'
import { Button } from '#src/components/button.tsx'
import { FaultText } from '#src/components/field.tsx'
import { PasswordField } from '#src/components/password-field.tsx'
import { announce } from '#src/lib/announce.ts'

/** The present password and a new one. Every other session of the person ends. */
export function PasswordChange({ onDone }: { onDone: () => void }) {
  const me = useMe()
  const change = useChangePassword()
  const { register, handleSubmit, formState } = useForm({
    resolver: zodResolver(changePassword.body),
    defaultValues: { current: '', next: '' },
  })
  const submit = handleSubmit((body) =>
    change.mutate(body, {
      onSuccess: () => {
        announce('Password changed')
        onDone()
      },
    }),
  )
  const wrong = change.error instanceof ApiProblem && change.error.code === 'wrong-password'
  const general = wrong ? null : generalFault(change.error, 'next')
  return (
    <form onSubmit={submit} noValidate className="grid gap-3">
      <p className="text-ink-2">Every other session of yours ends. This one goes on.</p>
      {/* For password managers: which account the two passwords belong to. */}
      <input type="text" autoComplete="username" value={me?.email ?? ''} readOnly hidden />
      <PasswordField
        label="Present password"
        autoComplete="current-password"
        error={wrong ? 'Present password not right' : (formState.errors.current?.message ?? null)}
        {...register('current')}
      />
      <PasswordField
        label="New password"
        autoComplete="new-password"
        hint="15 characters or more. Several words are easier to keep than signs."
        error={formState.errors.next?.message ?? fieldFault(change.error, 'next')}
        {...register('next')}
      />
      {general !== null && (
        <div role="alert">
          <FaultText>{general}</FaultText>
        </div>
      )}
      <Button type="submit" look="first" pending={change.isPending} className="mt-1 justify-self-start">
        Change password
      </Button>
    </form>
  )
}
