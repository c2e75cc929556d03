import { useQuery } from '@tanstack/react-query'
import { type FormEvent, useRef, useState } from 'react'
import { Navigate, useLocation, useSearchParams } from 'react-router-dom'
import { z } from 'zod'
import type { SessionState } from '#shared/api/session.ts'
import { ApiProblem } from '#src/api/api-problem.ts'
import { sessionQuery, useMe, useSignIn } from '#src/api/session.ts'
import { Button } from '#src/components/button.tsx'
import { Field } from '#src/components/field.tsx'
import { LedgePage } from '#src/components/ledge-page.tsx'
import { PasswordField } from '#src/components/password-field.tsx'
import { announce } from '#src/lib/announce.ts'
import { ownPath } from '#src/lib/own-path.ts'

/** Handed on by the screen whose session ended. */
const endedState = z.object({ ended: z.literal(true) })

/** The one message for a wrong e-mail and a wrong password; what else went wrong is said as it is. */
function signInFault(error: Error): string {
  if (!(error instanceof ApiProblem)) return error.message
  if (error.code === 'wrong-password' || error.code === 'bad-request') return 'E-mail or password not right'
  if (error.code === 'too-many' && error.retryAfter !== null) {
    return `Too many tries. Wait ${Math.ceil(error.retryAfter / 60)} min, then try again.`
  }
  return error.message
}

export function SignInPage() {
  const [search] = useSearchParams()
  const me = useMe()
  const demonstration = useQuery(sessionQuery).data?.demonstration ?? null
  const signIn = useSignIn()
  const ended = endedState.safeParse(useLocation().state).success
  const [email, setEmail] = useState('')
  const [password, setPassword] = useState('')
  const form = useRef<HTMLFormElement>(null)

  if (me) return <Navigate to={ownPath(search.get('next'))} replace />

  const focus = (name: string) => form.current?.querySelector<HTMLElement>(`[name="${name}"]`)?.focus()
  const submit = (event: FormEvent) => {
    event.preventDefault()
    if (email.trim() === '') return focus('email')
    if (password === '') return focus('password')
    signIn.mutate({ email: email.trim(), password }, { onError: () => focus('password') })
  }
  const fill = (person: { name: string; email: string }, common: string) => {
    setEmail(person.email)
    setPassword(common)
    signIn.reset()
    announce(`Filled in for ${person.name}`)
    focus('submit')
  }
  const fault = signIn.isError ? signInFault(signIn.error) : null

  return (
    <LedgePage beside={demonstration && <Demonstration demonstration={demonstration} onFill={fill} />}>
      <title>Sign in · Brinkbook</title>
      <h1 className="sr-only">Sign in</h1>
      {ended && (
        <div role="status" className="mb-4 grid gap-1">
          <p className="text-subtitle">You were signed out</p>
          <p className="text-note text-ink-2">
            Remarks you were writing are kept in this tab, for you only. Sign in and go on.
          </p>
        </div>
      )}
      <form ref={form} onSubmit={submit} noValidate className="grid gap-3">
        <Field
          label="E-mail"
          name="email"
          type="email"
          autoComplete="username"
          autoCapitalize="none"
          spellCheck={false}
          required
          value={email}
          onChange={(event) => setEmail(event.target.value)}
        />
        <PasswordField
          label="Password"
          name="password"
          autoComplete="current-password"
          required
          value={password}
          error={fault}
          onChange={(event) => setPassword(event.target.value)}
        />
        <div role="alert" className="sr-only">
          {fault}
        </div>
        <Button type="submit" name="submit" look="first" pending={signIn.isPending} className="mt-3 justify-self-start">
          {signIn.isPending ? 'Signing in' : 'Sign in'}
        </Button>
      </form>
      <p className="mt-5 text-note text-ink-2">
        Forgotten password? An administrator of this library can hand you a link for a new one.
      </p>
    </LedgePage>
  )
}

type Demo = NonNullable<SessionState['demonstration']>

function Demonstration(props: {
  demonstration: Demo
  onFill: (person: Demo['people'][number], password: string) => void
}) {
  const { password, people } = props.demonstration
  return (
    <section aria-label="Demonstration accounts" className="sheet grid w-full gap-3 p-5 bench:max-w-100">
      <h2 className="text-subtitle">Demonstration accounts</h2>
      <p className="text-note text-ink-2">
        They exist only because the demonstration library was loaded. The password of all is{' '}
        <span className="figures text-ink">{password}</span>.
      </p>
      <ul className="grid">
        {people.map((person) => (
          <li key={person.email} className="border-t border-rule">
            <button
              type="button"
              onClick={() => props.onFill(person, password)}
              aria-label={`Fill in ${person.name}, ${person.role}`}
              className="grid min-h-11 w-full content-center rounded-control px-2 py-1 text-left hover:bg-pencil-tint"
            >
              <span className="font-[620]">{person.name}</span>
              <span className="text-note text-ink-2">{person.role}</span>
            </button>
          </li>
        ))}
      </ul>
    </section>
  )
}
