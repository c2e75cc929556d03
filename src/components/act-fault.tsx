import type { ReactNode } from 'react'
import { FaultText } from './field.tsx'

/** An act that was refused: what happened, what still holds, what to do first. Announced at once. */
export function ActFault({ headline, text, children }: { headline: string; text: string; children?: ReactNode }) {
  return (
    <div role="alert" className="grid justify-items-start gap-1.5">
      <FaultText>{headline}</FaultText>
      {text !== '' && <p className="pl-5.5 text-note text-ink-2">{text}</p>}
      {children}
    </div>
  )
}
