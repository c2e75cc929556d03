import { Button } from '#src/components/button.tsx'
import { targetWords, written } from './remarks.ts'
import type { Remarks } from './use-remarks.ts'

/** Remarks written on a revision that was settled meanwhile: they were not sent, and are still there to take along. */
export function UnsentRemarks({ remarks }: { remarks: Remarks }) {
  const unsent = written(remarks.all)
  if (unsent.length === 0) return null
  return (
    <section aria-labelledby="unsent-remarks" className="sheet grid gap-2 p-4">
      <h2 id="unsent-remarks" className="text-subtitle">
        Your remarks, not sent
      </h2>
      <p className="text-note text-ink-2">The revision was settled first. They are kept in this tab, for you only.</p>
      <ul className="grid gap-2">
        {unsent.map((remark) => (
          <li key={remark.id} className="border-t border-rule pt-2">
            <p className="text-note text-ink-2">on {targetWords(remark.target)}</p>
            <p className="whitespace-pre-wrap">{remark.text}</p>
          </li>
        ))}
      </ul>
      <div>
        <Button onClick={remarks.clear}>Discard them</Button>
      </div>
    </section>
  )
}
