import { useId } from 'react'
import type { StabilityCard } from '#shared/model/card-document.ts'
import { type VerdictKind, type VerdictWords, verdictWords } from '#shared/stability/sentences.ts'
import type { DescribedModel } from '#shared/stability/summary.ts'
import { OnsetGlyph } from '#src/components/onset-glyph.tsx'
import { classes } from '#src/lib/class-names.ts'
import { decimalMark } from '#src/lib/decimal-mark.ts'
import { glyphsOf, verdictHues as hues, kindWords } from './geometry/verdict.ts'

export interface VerdictHeadProps {
  card: StabilityCard
  words: VerdictWords
  earlier: { document: DescribedModel & { quietWord?: string }; card: StabilityCard; label: string } | null
  /** "computing", "from 09:41, older", or nothing. */
  note: string | null
  older: boolean
  headingId: string
  sentenceId: string
  level: 1 | 2 | 3
}

function Was({ earlier, now }: { earlier: NonNullable<VerdictHeadProps['earlier']>; now: VerdictKind }) {
  const words = verdictWords(earlier.card, earlier.document, { decimalMark })
  if (words.kind === now) return null
  return (
    <p className="border-l border-rule pl-3.5 text-label text-ink-2">
      Against {earlier.label}
      <span className="mt-1 flex items-center gap-2">
        {glyphsOf(earlier.card, words.glyph).map((glyph) => (
          <OnsetGlyph key={glyph} kind={glyph} size={18} />
        ))}
        <span className={classes('text-body font-[620]', hues[words.kind])}>was {kindWords[words.kind]}</span>
      </span>
    </p>
  )
}

/** A second kind named in the headline is in its own hue as well. */
function Coloured({ text }: { text: string }) {
  return text.split(/\b(hard|soft)\b/).map((part) =>
    part === 'hard' || part === 'soft' ? (
      <span key={part} className={hues[part]}>
        {part}
      </span>
    ) : (
      part
    ),
  )
}

/** The verdict: glyph, headline and the sentence that says what happens to the machine. */
export function VerdictHead({ card, words, earlier, note, older, headingId, sentenceId, level }: VerdictHeadProps) {
  const Heading = `h${level}` as const
  const noteId = useId()
  return (
    <header className="grid gap-x-4 gap-y-2 @min-[760px]:grid-cols-[1fr_auto]">
      <div className={classes('flex items-start gap-4', older && 'card-older-words')}>
        <span className="mt-0.5 flex shrink-0 gap-2">
          {glyphsOf(card, words.glyph).map((glyph) => (
            <OnsetGlyph key={glyph} kind={glyph} size={48} faded={older} />
          ))}
        </span>
        <div className="min-w-0">
          <Heading
            id={headingId}
            aria-describedby={note ? noteId : undefined}
            className="text-[1.75rem]/[2.125rem] font-[720] tracking-[-0.015em] text-balance @min-[620px]:text-verdict"
          >
            <span className={hues[words.kind]}>
              {words.headline.kindWord}
              {words.kind === 'hard' || words.kind === 'soft' ? ' onset' : ''}
            </span>{' '}
            <Coloured text={words.headline.rest.replace(/^onset /, '')} />
          </Heading>
          <p id={sentenceId} className="mt-1 max-w-[68ch] text-sentence text-ink-2">
            {words.sentence}
          </p>
        </div>
      </div>
      <div className="grid content-start gap-2 @min-[760px]:justify-items-end">
        {note && (
          <p id={noteId} className="text-note text-ink">
            {note}
          </p>
        )}
        {earlier && <Was earlier={earlier} now={words.kind} />}
      </div>
    </header>
  )
}
