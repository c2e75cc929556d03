import { type ReactNode, useState } from 'react'
import { Button } from '#src/components/button.tsx'
import { Check } from '#src/components/check.tsx'
import { Field } from '#src/components/field.tsx'

export interface ApproveFormProps {
  /** Why this viewer cannot approve; null where they can. */
  whyNot: string | null
  /** Remarks that are written but not sent speak against approving. */
  openRemarks: number
  pending: boolean
  /** Rejects nothing: the field is emptied whatever comes of it. */
  onApprove: (password: string, settled: () => void) => void
  fault: ReactNode
}

/** The two checks, the password, and the act. No single key approves. */
export function ApproveForm({ whyNot, openRemarks, pending, onApprove, fault }: ApproveFormProps) {
  const [equationsRead, setEquationsRead] = useState(false)
  const [verdictRead, setVerdictRead] = useState(false)
  const [password, setPassword] = useState('')
  const blocked =
    whyNot ??
    (openRemarks > 0 ? 'You have written a remark: return it, or clear the remark to approve.' : null) ??
    (!equationsRead || !verdictRead ? 'Tick both checks to approve.' : null) ??
    (password === '' ? 'Enter your password to sign.' : null)
  return (
    <form
      className="grid gap-3"
      aria-labelledby="sign-heading"
      onSubmit={(event) => {
        event.preventDefault()
        if (!blocked) onApprove(password, () => setPassword(''))
      }}
    >
      <h2 id="sign-heading" className="text-subtitle">
        Before approving
      </h2>
      <Check
        checked={equationsRead}
        disabled={whyNot !== null}
        onChange={(event) => setEquationsRead(event.target.checked)}
      >
        Equations, numbers and units read against their sources
      </Check>
      <Check
        checked={verdictRead}
        disabled={whyNot !== null}
        onChange={(event) => setVerdictRead(event.target.checked)}
      >
        Verdict and its consequence read
      </Check>
      {whyNot === null && (
        <Field
          label="Your password, to sign as approved"
          type="password"
          autoComplete="current-password"
          value={password}
          onChange={(event) => setPassword(event.target.value)}
        />
      )}
      {fault}
      <Button type="submit" look="first" pending={pending} unavailable={blocked}>
        Approve
      </Button>
      <p className="text-label text-ink-2">
        Your name, the time in UTC and the digest of this revision are recorded with the meanings "checked" and
        "approved". A model result is not a clearance, certificate or operating limit.
      </p>
    </form>
  )
}
