import { useEffect, useId, useRef, useState } from 'react'
import { Button } from '#src/components/button.tsx'
import { announce } from '#src/lib/announce.ts'
import { dismissKept, useKeptEdits } from './kept-edits.ts'

/** Lines that the library does not have, to be copied. */
export function LinesToCopy({ text, words, onDismiss }: { text: string; words: string; onDismiss?: () => void }) {
  const field = useRef<HTMLTextAreaElement>(null)
  const id = useId()
  const [copied, setCopied] = useState<'no' | 'yes' | 'refused'>('no')
  const copy = async () => {
    try {
      await navigator.clipboard.writeText(text)
      setCopied('yes')
      announce('Copied')
    } catch {
      // Over plain http a browser refuses: the lines are selected, to be copied by hand.
      setCopied('refused')
      field.current?.select()
    }
  }
  return (
    <div className="grid gap-2 text-note">
      <label htmlFor={id}>{words}</label>
      <textarea
        id={id}
        ref={field}
        readOnly
        rows={Math.min(8, text.split('\n').length + 1)}
        value={text}
        className="figures w-full rounded-control border border-line bg-well p-2 text-note"
      />
      <p className="flex flex-wrap items-center gap-2">
        <Button onClick={copy}>{copied === 'yes' ? 'Copied' : 'Copy'}</Button>
        {onDismiss && (
          <Button look="quiet" onClick={onDismiss}>
            Dismiss
          </Button>
        )}
        {copied === 'refused' && 'The browser did not allow copying. The lines are selected: copy them by hand.'}
      </p>
    </div>
  )
}

/** What was typed into a draft that has been left or loaded again since. It stays until it is dismissed. */
export function KeptLines({ person, page }: { person: number; page: number }) {
  const text = useKeptEdits(person, page)
  useEffect(() => {
    if (text === null) return
    const ask = (event: BeforeUnloadEvent) => event.preventDefault()
    window.addEventListener('beforeunload', ask)
    return () => window.removeEventListener('beforeunload', ask)
  }, [text])
  if (text === null) return null
  return (
    <section aria-label="Lines that were not saved" className="border-y-[1.5px] border-ink bg-sheet px-4 py-3">
      <LinesToCopy
        text={text}
        words="What you typed before and the library does not have. Put in what you want to keep, then dismiss it."
        onDismiss={() => {
          dismissKept(person, page)
          announce('Dismissed')
        }}
      />
    </section>
  )
}
