import { zodResolver } from '@hookform/resolvers/zod'
import { useQuery } from '@tanstack/react-query'
import { useForm } from 'react-hook-form'
import { useNavigate, useParams } from 'react-router-dom'
import { finishSetup } from '#shared/api/session.ts'
import { fieldFault, generalFault } from '#src/api/api-problem.ts'
import { setupQuery, useFinishSetup } from '#src/api/links.ts'
import { Button } from '#src/components/button.tsx'
import { FaultText, Field } from '#src/components/field.tsx'
import { PasswordField } from '#src/components/password-field.tsx'
import { LinkSheet } from '#src/features/session/link-sheet.tsx'
import { announce } from '#src/lib/announce.ts'

/** First run of an empty library: its first administrator. Groups and people follow in Administration. */
export function SetupPage() {
  const token = useParams().token ?? ''
  const link = useQuery(setupQuery(token))
  return (
    <LinkSheet
      title="First administrator"
      link={link}
      from="whoever started the server (it prints a link while nobody is set up)"
    >
      {() => <SetupForm token={token} />}
    </LinkSheet>
  )
}

function SetupForm({ token }: { token: string }) {
  const navigate = useNavigate()
  const finish = useFinishSetup(token)
  const { register, handleSubmit, formState } = useForm({
    resolver: zodResolver(finishSetup.body),
    defaultValues: { name: '', email: '', password: '' },
  })
  const submit = handleSubmit((body) =>
    finish.mutate(body, {
      onSuccess: () => {
        announce('Administrator set up')
        navigate('/admin/groups')
      },
    }),
  )
  const fault = (name: keyof typeof formState.errors) =>
    formState.errors[name]?.message ?? fieldFault(finish.error, name)
  const general = generalFault(finish.error, 'name', 'email', 'password')
  return (
    <form onSubmit={submit} noValidate className="grid gap-3">
      <h1 className="text-subtitle">First administrator</h1>
      <p className="text-ink-2">
        An administrator lays out groups and looks after people. It reads no page and approves nothing by being one.
      </p>
      <Field
        label="Name, as it stands under signatures"
        autoComplete="name"
        error={fault('name')}
        {...register('name')}
      />
      <Field label="E-mail" type="email" autoComplete="username" error={fault('email')} {...register('email')} />
      <PasswordField
        label="Password"
        autoComplete="new-password"
        hint="15 characters or more. Several words are easier to keep than signs."
        error={fault('password')}
        {...register('password')}
      />
      {general !== null && (
        <div role="alert">
          <FaultText>{general}</FaultText>
        </div>
      )}
      <Button type="submit" look="first" pending={finish.isPending} className="mt-2 justify-self-start">
        Set up and go on to groups
      </Button>
    </form>
  )
}
