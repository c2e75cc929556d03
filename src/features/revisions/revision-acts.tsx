import { useRef, useState } from 'react'
import type { RevisionHead } from '#shared/api/pages.ts'
import { actWords } from '#src/api/act-words.ts'
import { ApiProblem } from '#src/api/api-problem.ts'
import { useSendForReview, useTakeBack, useWithdrawRevision } from '#src/api/revisions.ts'
import { ActFault } from '#src/components/act-fault.tsx'
import { Button } from '#src/components/button.tsx'
import { Dialog } from '#src/components/dialog.tsx'
import { Field, TextField } from '#src/components/field.tsx'
import { newIdempotencyKey } from '#src/lib/idempotency-key.ts'

/** What went wrong, and what still holds; with the faults of the model where it was refused. */
export function Refusal({ error, notDone }: { error: Error | null; notDone: string }) {
  if (!error) return null
  const faults = error instanceof ApiProblem ? error.errors : []
  const { headline, text } = actWords(error, notDone)
  return (
    <ActFault headline={headline} text={text}>
      {faults.length > 0 && (
        <ul className="grid gap-1 pl-6 text-note">
          {faults.slice(0, 12).map((fault) => (
            <li key={`${fault.line}-${fault.path}-${fault.message}`}>
              {fault.line ? `Line ${fault.line}: ` : ''}
              {fault.message}
            </li>
          ))}
        </ul>
      )}
    </ActFault>
  )
}

export interface SendDialogProps {
  code: string
  generation: number
  open: boolean
  onClose: () => void
  onSent: (revision: RevisionHead) => void
}

/** Freezes the draft as a revision. The mark is computed by the server from what changes. */
export function SendDialog({ code, generation, open, onClose, onSent }: SendDialogProps) {
  const [summary, setSummary] = useState('')
  const key = useRef(newIdempotencyKey())
  const send = useSendForReview(code)
  const submit = () =>
    // A promise, not the callbacks of mutate: the page is read again first, and this dialog may be gone by then.
    send.mutateAsync({ summary: summary.trim(), generation, key: key.current }).then(
      (revision) => {
        key.current = newIdempotencyKey()
        setSummary('')
        onSent(revision)
      },
      // A refused try made nothing; the next one is another request.
      () => {
        key.current = newIdempotencyKey()
      },
    )
  return (
    <Dialog title="Send for review" open={open} onClose={onClose}>
      <form
        className="grid gap-4"
        onSubmit={(event) => {
          event.preventDefault()
          submit()
        }}
      >
        <p className="text-note text-ink-2">
          The draft is frozen as it stands and its card is computed once more on the server. Nobody can edit it until a
          maintainer who did not write in it approves it or returns it.
        </p>
        <TextField
          label="What changed, and why"
          value={summary}
          maxLength={500}
          rows={3}
          required
          onChange={(event) => setSummary(event.target.value)}
        />
        <Refusal error={send.error} notDone="Nothing is sent." />
        <div className="flex flex-wrap gap-2">
          <Button
            type="submit"
            look="first"
            pending={send.isPending}
            unavailable={summary.trim() === '' && 'Say what changed first.'}
          >
            {send.isPending ? 'Computing the card' : 'Send for review'}
          </Button>
          <Button look="quiet" onClick={onClose}>
            Keep as draft
          </Button>
        </div>
      </form>
    </Dialog>
  )
}

/** The sender's way back: the draft opens again. */
export function TakeBackButton({ code, revision }: { code: string; revision: RevisionHead }) {
  const takeBack = useTakeBack(code, revision.mark)
  return (
    <div className="grid gap-1.5">
      <Button pending={takeBack.isPending} onClick={() => takeBack.mutate({ etag: revision.etag })}>
        Take back
      </Button>
      <Refusal error={takeBack.error} notDone="It is not taken back." />
    </div>
  )
}

/** Takes a revision out of force, for good, with a reason and the password. */
export function WithdrawDialog({
  code,
  revision,
  open,
  onClose,
}: {
  code: string
  revision: RevisionHead
  open: boolean
  onClose: () => void
}) {
  const [reason, setReason] = useState('')
  const [password, setPassword] = useState('')
  const withdraw = useWithdrawRevision(code, revision.mark)
  return (
    <Dialog title={`Withdraw revision ${revision.mark}`} open={open} onClose={onClose}>
      <form
        className="grid gap-4"
        onSubmit={(event) => {
          event.preventDefault()
          withdraw.mutate(
            { reason: reason.trim(), password, etag: revision.etag },
            { onSuccess: onClose, onSettled: () => setPassword('') },
          )
        }}
      >
        <p className="text-note text-ink-2">
          Nothing is in force afterwards, and nothing older comes back. The revision stays readable with a band across
          it and your reason.
        </p>
        <TextField
          label="Reason"
          value={reason}
          maxLength={1000}
          rows={3}
          required
          onChange={(event) => setReason(event.target.value)}
        />
        <Field
          label="Your password, to sign the withdrawal"
          type="password"
          autoComplete="current-password"
          required
          value={password}
          onChange={(event) => setPassword(event.target.value)}
        />
        <Refusal error={withdraw.error} notDone="Nothing is withdrawn." />
        <div className="flex flex-wrap gap-2">
          <Button
            type="submit"
            look="first"
            pending={withdraw.isPending}
            unavailable={(reason.trim().length < 3 && 'Say why first.') || (password === '' && 'Enter your password.')}
          >
            Withdraw
          </Button>
          <Button look="quiet" onClick={onClose}>
            Leave it in force
          </Button>
        </div>
      </form>
    </Dialog>
  )
}
