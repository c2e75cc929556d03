import { roleWord } from './events.ts'
import { controlFigure, figure, observedFigure, withUnit } from './figures.ts'
import type { Piece } from './pieces.ts'
import type { CardGeometry } from './scene.ts'
import { nameOf } from './subject.ts'

function pieceSentence(piece: Piece, geometry: CardGeometry): string {
  const { subject } = geometry
  const ps = piece.points.map((point) => point.p)
  const from = controlFigure(
    ps.reduce((a, b) => Math.min(a, b), Number.POSITIVE_INFINITY),
    subject,
  )
  const to = controlFigure(
    ps.reduce((a, b) => Math.max(a, b), Number.NEGATIVE_INFINITY),
    subject,
  )
  const first = piece.points[0]
  const last = piece.points.at(-1)
  const kind = piece.stable ? 'Stable' : 'Unstable'
  const range = `${kind} steady state from ${from} to ${to}`
  if (!first || !last) return `${range}.`
  const [a, b] = [observedFigure(first.value, subject), observedFigure(last.value, subject)]
  const level =
    a === b ? `at ${withUnit(a, subject.observed.unit)}` : `running from ${a} to ${withUnit(b, subject.observed.unit)}`
  return `${range}, ${nameOf(subject.observed)} ${level}.`
}

/** One sentence for every curve and mark of the main drawing, for those who do not see it. */
export function drawingSentences(geometry: CardGeometry): string[] {
  const { subject, pieces, events, near } = geometry
  const control = nameOf(subject.control)
  const range = `${control} from ${controlFigure(subject.control.low, subject)} to ${withUnit(controlFigure(subject.control.high, subject), subject.control.unit)}.`
  const curves = pieces.filter((piece) => piece.points.length > 1).map((piece) => pieceSentence(piece, geometry))
  const marks = events.map((event) => `${event.name} at ${event.text}: ${event.detail}; ${roleWord(event)}.`)
  const predictions = near.flatMap(({ points, stable, side }) => {
    const last = points.at(-1)
    if (!last) return []
    const what = stable ? 'an oscillation grows' : 'the border of what dies out widens'
    const to = withUnit(figure(last.amplitude), subject.observed.unit)
    return [
      `Near-onset prediction: ${side} the onset ${what} to an amplitude of ${to} at ${controlFigure(last.p, subject)}.`,
    ]
  })
  return [range, ...(curves.length > 0 ? curves : ['No steady state was found.']), ...marks, ...predictions]
}
