import { zodResolver } from '@hookform/resolvers/zod'
import { useQuery } from '@tanstack/react-query'
import { useForm } from 'react-hook-form'
import { useNavigate, useParams } from 'react-router-dom'
import { finishPasswordLink, type OneTimeLink } from '#shared/api/session.ts'
import { fieldFault, generalFault } from '#src/api/api-problem.ts'
import { passwordLinkQuery, useFinishPasswordLink } from '#src/api/links.ts'
import { Button } from '#src/components/button.tsx'
import { FaultText, Field } from '#src/components/field.tsx'
import { PasswordField } from '#src/components/password-field.tsx'
import { LinkSheet } from '#src/features/session/link-sheet.tsx'
import { announce } from '#src/lib/announce.ts'

/** A new password, by a link an administrator handed over. */
export function PasswordLinkPage() {
  const token = useParams().token ?? ''
  const link = useQuery(passwordLinkQuery(token))
  return (
    <LinkSheet title="New password" link={link} from="an administrator">
      {(found) => <PasswordForm token={token} link={found} />}
    </LinkSheet>
  )
}

function PasswordForm({ token, link }: { token: string; link: OneTimeLink }) {
  const navigate = useNavigate()
  const finish = useFinishPasswordLink(token)
  const { register, handleSubmit, formState } = useForm({
    resolver: zodResolver(finishPasswordLink.body),
    defaultValues: { password: '' },
  })
  const submit = handleSubmit((body) =>
    finish.mutate(body, {
      onSuccess: () => {
        announce('Password changed')
        navigate('/')
      },
    }),
  )
  const general = generalFault(finish.error, 'password')
  return (
    <form onSubmit={submit} noValidate className="grid gap-3">
      <h1 className="text-subtitle">New password</h1>
      <p className="text-ink-2">It ends every session that is still open for this account.</p>
      <Field label="E-mail" type="email" autoComplete="username" value={link.email ?? ''} readOnly />
      <PasswordField
        label="New password"
        autoComplete="new-password"
        hint="15 characters or more."
        error={formState.errors.password?.message ?? fieldFault(finish.error, 'password')}
        {...register('password')}
      />
      {general !== null && (
        <div role="alert">
          <FaultText>{general}</FaultText>
        </div>
      )}
      <Button type="submit" look="first" pending={finish.isPending} className="mt-2 justify-self-start">
        Change and sign in
      </Button>
    </form>
  )
}
