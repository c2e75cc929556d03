import { useState } from 'react'
import { announce } from '#src/lib/announce.ts'
import { momentOf } from '#src/lib/times.ts'
import { Button } from './button.tsx'
import { Field } from './field.tsx'

/** A one-time link to hand over, shown this once, with a button that copies it. `link` may be a path of this library. */
export function HandedLink({ label, link, expiresAt }: { label: string; link: string; expiresAt: string }) {
  const [copied, setCopied] = useState<'no' | 'yes' | 'refused'>('no')
  const address = new URL(link, location.origin).href
  const copy = async () => {
    try {
      await navigator.clipboard.writeText(address)
      setCopied('yes')
      announce('Link copied')
    } catch {
      // Over plain http a browser refuses: the field's text is there to be copied by hand.
      setCopied('refused')
    }
  }
  return (
    <div className="grid gap-2">
      <Field
        label={label}
        figures
        readOnly
        value={address}
        onFocus={(event) => event.target.select()}
        hint={`Shown this once. Good for one use, until ${momentOf(expiresAt)}. Hand it over yourself: this server sends no mail.`}
        error={copied === 'refused' ? 'The browser did not allow copying. Copy the text of the field.' : null}
      />
      <Button onClick={copy} className="justify-self-start">
        {copied === 'yes' ? 'Copied' : 'Copy link'}
      </Button>
    </div>
  )
}
