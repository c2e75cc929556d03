import type { CardSummary } from '#shared/api/pages.ts'
import { shortFigure } from './figures.ts'
import { kindTitle } from './kind-words.ts'

/** What an edge strip shows, in words, for those who do not see it. */
export function stripText(card: CardSummary): string {
  const { control } = card
  const unit = control.unit === '' || control.unit === '1' ? '' : ` ${control.unit}`
  const name = control.meaning || control.symbol
  const parts = [`${name} from ${shortFigure(control.low)} to ${shortFigure(control.high)}${unit}.`]
  if (card.ground.length === 0) parts.push('Nowhere stable in this range.')
  else {
    const stretches = card.ground.map((stretch) => `${shortFigure(stretch.from)} to ${shortFigure(stretch.to)}`)
    parts.push(`Stable from ${stretches.join(', and from ')}.`)
  }
  for (const onset of card.onsets.filter((candidate) => candidate.operating)) {
    const kind = kindTitle[onset.verdict === 'hard' || onset.verdict === 'soft' ? onset.verdict : 'undecided']
    const side = onset.direction > 0 ? 'rising' : 'falling'
    parts.push(`${kind} onset at ${shortFigure(onset.p)}, ${side}.`)
  }
  for (const end of card.otherEnds) if (end.kind === 'fold') parts.push(`Turning point at ${shortFigure(end.p)}.`)
  if (card.onsets.some((onset) => onset.operating && onset.verdict === 'hard'))
    parts.push('Where it comes back is not computed yet.')
  parts.push(`Running at ${shortFigure(control.value)}.`)
  return parts.join(' ')
}
