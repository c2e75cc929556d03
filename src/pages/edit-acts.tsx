import { useState } from 'react'
import { useNavigate } from 'react-router-dom'
import type { Page } from '#shared/api/pages.ts'
import { useRenewDraft } from '#src/api/drafts.ts'
import { Button, ButtonLink } from '#src/components/button.tsx'
import { FaultText } from '#src/components/field.tsx'
import type { DraftConnection, DraftConnectionState } from '#src/features/editor/draft-connection.ts'
import { useConnectionState } from '#src/features/editor/use-draft-connection.ts'
import { SendDialog } from '#src/features/revisions/revision-acts.tsx'
import { announce } from '#src/lib/announce.ts'
import type { CardState } from '#src/workers/card-runner.ts'
import { useCommandKey } from './use-command-key.ts'

/** Why the draft cannot be sent now; null where it can. */
export function whyNotSend(phase: DraftConnectionState['phase'], checked: CardState['checked']): string | null {
  if (phase !== 'saved') return 'Wait until every edit is saved.'
  return checked?.errors.length ? 'Settle the faults first.' : null
}

/** The act of the co-edit view: to send the draft, or to open the review it is in. */
export function EditActs({ page, connection, live }: { page: Page; connection: DraftConnection; live: CardState }) {
  const state = useConnectionState(connection)
  const navigate = useNavigate()
  const [sending, setSending] = useState(false)
  const maySend = page.may.includes('draft:write') && !page.inReview
  const why = whyNotSend(state.phase, live.checked)
  useCommandKey('send', () => {
    if (!maySend) return
    // Pressed too early it does nothing later on: whoever pressed it hears why.
    if (why === null) setSending(true)
    else announce(why)
  })
  if (page.inReview) {
    return (
      <ButtonLink to={`/reviews/${page.code}/${page.inReview.mark}`} look="first">
        Open the review
      </ButtonLink>
    )
  }
  if (!maySend) return null
  return (
    <>
      <Button
        look="first"
        unavailable={why}
        showReason={false}
        onClick={() => setSending(true)}
        title={why ?? undefined}
      >
        Send for review
      </Button>
      <SendDialog
        code={page.code}
        generation={state.generation ?? page.draft?.generation ?? 1}
        open={sending}
        onClose={() => setSending(false)}
        onSent={(revision) => {
          announce('Sent for review')
          navigate(`/m/${page.code}/rev/${revision.mark}`)
        }}
      />
    </>
  )
}

/** A maintainer's way out of a draft that takes nothing more: everybody in it loads the new one. */
export function RenewDraft({ code, generation }: { code: string; generation: number }) {
  const renew = useRenewDraft(code)
  return (
    <>
      <Button
        pending={renew.isPending}
        onClick={() => renew.mutate(generation, { onSuccess: () => announce('Draft begun anew') })}
      >
        Begin the draft anew
      </Button>
      {renew.error && <FaultText>{renew.error.message}</FaultText>}
    </>
  )
}
