import type { StabilityCard } from '#shared/model/card-document.ts'
import { verdictWords } from '#shared/stability/sentences.ts'
import type { DescribedModel } from '#shared/stability/summary.ts'
import { OnsetGlyph } from '#src/components/onset-glyph.tsx'
import { classes } from '#src/lib/class-names.ts'
import { decimalMark } from '#src/lib/decimal-mark.ts'
import { glyphsOf, verdictHues } from './geometry/verdict.ts'

/** Glyph and headline in one line of 48 px, to stay in sight where model and behaviour stand one above the other. */
export function VerdictBar({
  document,
  card,
  older = false,
  className,
}: {
  document: DescribedModel & { quietWord?: string }
  card: StabilityCard
  older?: boolean
  className?: string
}) {
  const words = verdictWords(card, document, { decimalMark })
  const { kindWord, rest } = words.headline
  return (
    <p className={classes('flex min-h-12 items-center gap-3 bg-sheet px-4', older && 'card-older-words', className)}>
      {glyphsOf(card, words.glyph).map((glyph) => (
        <OnsetGlyph key={glyph} kind={glyph} size={24} faded={older} />
      ))}
      <span className="text-subtitle">
        <span className={verdictHues[words.kind]}>{kindWord}</span> {rest}
      </span>
    </p>
  )
}
