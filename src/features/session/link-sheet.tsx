import type { UseQueryResult } from '@tanstack/react-query'
import type { ReactNode } from 'react'
import type { OneTimeLink } from '#shared/api/session.ts'
import { ApiProblem } from '#src/api/api-problem.ts'
import { Button, ButtonLink } from '#src/components/button.tsx'
import { LedgePage } from '#src/components/ledge-page.tsx'
import { Waiting } from '#src/components/pencil-line.tsx'
import { momentOf } from '#src/lib/times.ts'

/** A one-time link on the ledge: waiting, used up, not answered, or the form it leads to. */
export function LinkSheet(props: {
  title: string
  link: UseQueryResult<OneTimeLink>
  /** Who can give a new one. */
  from: string
  children: (link: OneTimeLink) => ReactNode
}) {
  const { title, link, from, children } = props
  const used = link.error instanceof ApiProblem && [410, 404, 400].includes(link.error.status)
  return (
    <LedgePage>
      <title>{`${title} · Brinkbook`}</title>
      {link.isPending && <Waiting what="Reading the link" />}
      {link.isError && (
        <div role="alert" className="grid justify-items-start gap-3">
          <h1 className="text-subtitle">{used ? 'This link is used up' : 'The library did not answer'}</h1>
          <p className="text-ink-2">
            {used ? `It was used, taken back or has run out. Ask ${from} for a new one.` : link.error.message}
          </p>
          {used ? (
            <ButtonLink to="/sign-in">To sign in</ButtonLink>
          ) : (
            <Button onClick={() => link.refetch()}>Try again now</Button>
          )}
        </div>
      )}
      {link.isSuccess && (
        <>
          {children(link.data)}
          <p className="mt-5 text-note text-ink-2">
            The link is good for one use, until {momentOf(link.data.expiresAt)}.
          </p>
        </>
      )}
    </LedgePage>
  )
}
