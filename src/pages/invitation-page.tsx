import { useQuery } from '@tanstack/react-query'
import { type FormEvent, useState } from 'react'
import { useNavigate, useParams } from 'react-router-dom'
import { newPassword } from '#shared/api/common.ts'
import type { OneTimeLink } from '#shared/api/session.ts'
import { ApiProblem, fieldFault, generalFault } from '#src/api/api-problem.ts'
import { invitationQuery, useAcceptInvitation } from '#src/api/links.ts'
import { Button } from '#src/components/button.tsx'
import { FaultText, Field } from '#src/components/field.tsx'
import { PasswordField } from '#src/components/password-field.tsx'
import { LinkSheet } from '#src/features/session/link-sheet.tsx'
import { announce } from '#src/lib/announce.ts'
import { roleAllows, roleWord } from '#src/lib/role-words.ts'

/** An invitation to a group: a new account, or the password of the one the address already has. */
export function InvitationPage() {
  const token = useParams().token ?? ''
  const link = useQuery(invitationQuery(token))
  return (
    <LinkSheet title="Invitation" link={link} from="the maintainer who invited you">
      {(invitation) => <AcceptForm token={token} invitation={invitation} />}
    </LinkSheet>
  )
}

function AcceptForm({ token, invitation }: { token: string; invitation: OneTimeLink }) {
  const navigate = useNavigate()
  const accept = useAcceptInvitation(token)
  const [name, setName] = useState(invitation.name ?? '')
  const [password, setPassword] = useState('')
  const [checked, setChecked] = useState(false)

  const isNew = !invitation.hasAccount
  const passwordFault = isNew ? (newPassword.safeParse(password).error?.issues[0]?.message ?? null) : null
  const nameFault = isNew && name.trim() === '' ? 'Must not be empty' : null
  const submit = (event: FormEvent) => {
    event.preventDefault()
    setChecked(true)
    if (passwordFault || nameFault || password === '') return
    accept.mutate(isNew ? { name: name.trim(), password } : { password }, {
      onSuccess: () => {
        announce(`You are a member of ${invitation.group ?? 'the group'}`)
        navigate('/')
      },
    })
  }
  const wrong = accept.error instanceof ApiProblem && accept.error.code === 'wrong-password'
  const general = wrong ? null : generalFault(accept.error, 'password', 'name')
  return (
    <form onSubmit={submit} noValidate className="grid gap-3">
      <h1 className="text-subtitle">{invitation.group === null ? 'Invitation' : `Join ${invitation.group}`}</h1>
      {invitation.role && (
        <p className="text-ink-2">
          As <strong className="text-ink">{roleWord[invitation.role].toLowerCase()}</strong>, who{' '}
          {roleAllows[invitation.role]}.
        </p>
      )}
      <Field label="E-mail" type="email" autoComplete="username" value={invitation.email ?? ''} readOnly />
      {isNew && (
        <Field
          label="Name, as it stands under signatures"
          autoComplete="name"
          value={name}
          error={checked ? (nameFault ?? fieldFault(accept.error, 'name')) : null}
          onChange={(event) => setName(event.target.value)}
        />
      )}
      <PasswordField
        label={isNew ? 'New password' : 'Password'}
        autoComplete={isNew ? 'new-password' : 'current-password'}
        hint={
          isNew
            ? '15 characters or more.'
            : 'There is an account for this address. Its password accepts the invitation.'
        }
        value={password}
        error={
          wrong
            ? 'Password not right'
            : checked
              ? (passwordFault ?? (password === '' ? 'Enter your password' : fieldFault(accept.error, 'password')))
              : null
        }
        onChange={(event) => setPassword(event.target.value)}
      />
      {general !== null && (
        <div role="alert">
          <FaultText>{general}</FaultText>
        </div>
      )}
      <Button type="submit" look="first" pending={accept.isPending} className="mt-2 justify-self-start">
        Accept and sign in
      </Button>
    </form>
  )
}
