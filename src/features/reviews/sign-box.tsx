import { useState } from 'react'
import type { RevisionHead } from '#shared/api/pages.ts'
import { ApiProblem } from '#src/api/api-problem.ts'
import { useApproveRevision, useReturnRevision } from '#src/api/revisions.ts'
import { Button } from '#src/components/button.tsx'
import { Check } from '#src/components/check.tsx'
import { FaultText, Field, TextField } from '#src/components/field.tsx'

export interface SignBoxProps {
  code: string
  revision: RevisionHead
  /** Why this viewer cannot approve; null where they can. */
  whyNot: string | null
  mayReturn: boolean
  /** Lines and symbols a remark may be pinned to. */
  lines: readonly { line: number; text: string }[]
  symbols: readonly string[]
  onSettled: (what: 'Approved' | 'Returned with remarks') => void
}

interface DraftRemark {
  id: number
  text: string
  target: string
}

const conflictWords: Partial<Record<ApiProblem['code'], string>> = {
  changed: 'It changed while you were reading. Nothing is signed; load the page again and read the change.',
  'already-settled': 'Somebody else has settled this revision already. Your signature is not recorded.',
  'base-superseded':
    'A newer revision came into force since this one was sent. Return it, so that its changes can be put on top.',
}

const wordsOf = (error: Error) =>
  error instanceof ApiProblem ? (conflictWords[error.code] ?? error.message) : error.message

/** Where a revision is settled: approved with the password, or returned with remarks. No single key approves. */
export function SignBox({ code, revision, whyNot, mayReturn, lines, symbols, onSettled }: SignBoxProps) {
  const [equationsRead, setEquationsRead] = useState(false)
  const [verdictRead, setVerdictRead] = useState(false)
  const [password, setPassword] = useState('')
  const [remarks, setRemarks] = useState<DraftRemark[]>([{ id: 0, text: '', target: '' }])
  const approve = useApproveRevision(code, revision.mark)
  const giveBack = useReturnRevision(code, revision.mark)
  const written = remarks.filter((remark) => remark.text.trim() !== '')
  const change = (id: number, part: Partial<DraftRemark>) =>
    setRemarks((all) => all.map((remark) => (remark.id === id ? { ...remark, ...part } : remark)))
  const blocked =
    whyNot ??
    (written.length > 0 ? 'You have written a remark: return it, or clear the remark to approve.' : null) ??
    (!equationsRead || !verdictRead ? 'Tick both checks to approve.' : null) ??
    (password === '' ? 'Enter your password to sign.' : null)
  return (
    <section aria-labelledby="sign-heading" className="sheet grid content-start gap-5 p-4">
      <form
        className="grid gap-3"
        onSubmit={(event) => {
          event.preventDefault()
          if (blocked) return
          approve.mutate(
            { password, etag: revision.etag },
            { onSuccess: () => onSettled('Approved'), onSettled: () => setPassword('') },
          )
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
        {approve.error && <FaultText>{wordsOf(approve.error)}</FaultText>}
        <Button type="submit" look="first" pending={approve.isPending} unavailable={blocked}>
          Approve
        </Button>
        <p className="text-label text-ink-2">
          Your name, the time and the digest of this revision are recorded with the meaning "approved". A model result
          is not a clearance, certificate or operating limit.
        </p>
      </form>
      {mayReturn && (
        <form
          className="grid gap-3 border-t border-rule pt-4"
          onSubmit={(event) => {
            event.preventDefault()
            if (written.length === 0) return
            giveBack.mutate(
              {
                etag: revision.etag,
                remarks: written.map((remark) => ({ text: remark.text.trim(), ...targetOf(remark.target) })),
              },
              { onSuccess: () => onSettled('Returned with remarks') },
            )
          }}
        >
          <h3 className="text-subtitle">Remarks</h3>
          {remarks.map((remark, index) => (
            <fieldset key={remark.id} className="grid gap-2">
              <legend className="sr-only">Remark {index + 1}</legend>
              <TextField
                label={`Remark ${index + 1}`}
                value={remark.text}
                rows={3}
                maxLength={4000}
                onChange={(event) => change(remark.id, { text: event.target.value })}
              />
              <label className="grid gap-1 text-label text-ink-2">
                Speaks of
                <select
                  className="min-h-11 w-full rounded-control border border-line bg-sheet px-2 text-body text-ink bench:min-h-8"
                  value={remark.target}
                  onChange={(event) => change(remark.id, { target: event.target.value })}
                >
                  <option value="">the whole revision</option>
                  {lines.map((line) => (
                    <option key={line.line} value={`line ${line.line}`}>
                      line {line.line}: {line.text.slice(0, 48)}
                    </option>
                  ))}
                  {symbols.map((symbol) => (
                    <option key={symbol} value={`symbol ${symbol}`}>
                      {symbol}
                    </option>
                  ))}
                </select>
              </label>
            </fieldset>
          ))}
          <div className="flex flex-wrap gap-2">
            <Button
              look="quiet"
              onClick={() =>
                setRemarks((all) => [...all, { id: Math.max(...all.map((one) => one.id)) + 1, text: '', target: '' }])
              }
            >
              Another remark
            </Button>
            <Button
              type="submit"
              pending={giveBack.isPending}
              unavailable={written.length === 0 && 'Write a remark first.'}
            >
              Return with remarks
            </Button>
          </div>
          {giveBack.error && <FaultText>{wordsOf(giveBack.error)}</FaultText>}
        </form>
      )}
    </section>
  )
}

function targetOf(target: string): { line?: number; symbol?: string } {
  if (target.startsWith('line ')) return { line: Number(target.slice(5)) }
  if (target.startsWith('symbol ')) return { symbol: target.slice(7) }
  return {}
}
