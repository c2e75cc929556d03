import type { CardComparison } from '#shared/stability/compare.ts'
import { OnsetGlyph } from '#src/components/onset-glyph.tsx'
import { kindHue, kindWord } from '#src/lib/kind-words.ts'

/** Why there is no comparison: no revision ever, none any more since the last one was withdrawn, or one this page cannot read. */
export type Uncompared = 'first' | 'withdrawn' | 'unreadable'

const without: Record<Uncompared, string> = {
  first: 'puts the first revision in force',
  withdrawn: 'puts a revision in force again; the last one was withdrawn',
  unreadable: 'replaces a revision that this page cannot read: load it again',
}

export interface ConsequenceHeadProps {
  comparison: CardComparison | Uncompared
  /** "Approving this" in a review, "Revision 2.0.0" in a comparison. */
  verb: string
  /** One sentence on what moves. */
  note?: string | null
}

/** The consequence first: does the verdict change? */
export function ConsequenceHead({ comparison, verb, note = null }: ConsequenceHeadProps) {
  const said = note && <p className="text-sentence text-ink-2">{note}</p>
  if (typeof comparison === 'string' || !comparison.kind) {
    const words = typeof comparison === 'string' ? without[comparison] : 'leaves the verdict as it is'
    return (
      <div>
        <h2 className="text-consequence max-tablet:text-[1.5rem]/[1.8125rem]">{`${verb} ${words}`}</h2>
        {said}
      </div>
    )
  }
  const { was, now } = comparison.kind
  return (
    <div className="flex flex-wrap items-center gap-x-5 gap-y-2">
      <span className="flex items-center gap-3" aria-hidden>
        <OnsetGlyph kind={was} size={44} />
        <span className="text-title">→</span>
        <OnsetGlyph kind={now} size={44} />
      </span>
      <div className="min-w-0">
        <h2 className="text-consequence max-tablet:text-[1.5rem]/[1.8125rem]">
          {verb} turns the verdict from <span className={kindHue[was]}>{kindWord[was]}</span> to{' '}
          <span className={kindHue[now]}>{kindWord[now]}</span>
        </h2>
        {said}
      </div>
    </div>
  )
}
