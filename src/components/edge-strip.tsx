import { useId } from 'react'
import type { CardSummary } from '#shared/api/pages.ts'
import { shortFigure } from '#src/lib/figures.ts'
import { stripText } from '#src/lib/strip-text.ts'
import { stripGeometry, stripHeights } from './edge-strip-geometry.ts'
import { OnsetMark } from './onset-mark.tsx'

const hue = { soft: 'var(--color-soft)', hard: 'var(--color-hard)', undecided: 'var(--color-open)' } as const

/** Lines at +45 degrees, 5.7 px apart; the corners complete those that cross the tile's edge. */
const hatchPath = 'M-1 1L1 -1M0 8L8 0M7 9L9 7'

export interface EdgeStripProps {
  card: CardSummary
  /** Width of the range in pixels; the drawing is as wide, and shrinks with its column. */
  width?: number
  /** At 45 %, for withdrawn revisions. */
  faded?: boolean
}

/**
 * The edge of a model, to scale over its control range, which always rises to the right: hatched ground where the steady
 * state is stable, a ramp at a soft onset, an undercut lip at a hard one, the running point as a plumb triangle.
 */
export function EdgeStrip({ card, width = 200, faded = false }: EdgeStripProps) {
  const id = useId()
  const { level, lip, floor, tip, numbers, all } = stripHeights
  const strip = stripGeometry(card, width)
  return (
    <svg
      role="img"
      aria-label={stripText(card)}
      viewBox={`-5 0 ${width + 10} ${all}`}
      width={width + 10}
      className={`block h-auto max-w-full ${faded ? 'opacity-45' : ''}`}
    >
      <pattern id={id} width="8" height="8" patternUnits="userSpaceOnUse">
        <path d={hatchPath} className="hatch-line" strokeWidth="0.8" />
      </pattern>
      {strip.ground.map((piece) => (
        <path key={piece.left.x} d={piece.outline} fill={`url(#${id})`} />
      ))}
      {strip.floors.map((part) => (
        <path
          key={part.from}
          d={`M${part.from} ${floor}H${part.to}`}
          stroke={hue[part.kind]}
          strokeWidth={part.kind === 'undecided' ? 1.6 : 2.4}
          strokeDasharray={part.kind === 'undecided' ? '3 4' : undefined}
        />
      ))}
      {strip.ramps.map((ramp) => (
        <path key={ramp.path} d={ramp.path} stroke={hue.soft} strokeWidth="2.4" />
      ))}
      {strip.undercuts.map((undercut) => (
        // Dotted: that the way back lies under the lip is known, where is not.
        <path
          key={undercut.x}
          d={`M${undercut.x} ${lip}V${floor}`}
          stroke="var(--color-ink)"
          strokeWidth="1.6"
          strokeDasharray="2 3"
        />
      ))}
      {strip.lips.map((part) => (
        <path key={part.path} d={part.path} fill="none" stroke="var(--color-ink)" strokeWidth="2" />
      ))}
      {strip.faces.map((face) => (
        <path
          key={face.x}
          d={`M${face.x} ${level}V${floor}`}
          stroke={face.dotted ? hue.undecided : 'var(--color-ink)'}
          strokeWidth={face.dotted ? 1.6 : 2}
          strokeDasharray={face.dotted ? '3 3' : undefined}
        />
      ))}
      {strip.dashed.map((part) => (
        <path
          key={part.from}
          d={`M${part.from} ${level}H${part.to}`}
          stroke="var(--color-ink)"
          strokeWidth="1.6"
          strokeDasharray="5 3.5"
        />
      ))}
      {strip.ground.map((piece) => (
        <path
          key={piece.left.x}
          d={`M${piece.left.x} ${level}H${piece.right.x}`}
          stroke="var(--color-ink)"
          strokeWidth="2.2"
        />
      ))}
      {strip.marks.map((mark) =>
        mark.kind === 'turning-point' ? (
          <circle
            key={mark.x}
            cx={mark.x}
            cy={level}
            r="3.6"
            fill="var(--color-sheet)"
            stroke="var(--color-ink)"
            strokeWidth="1.8"
          />
        ) : (
          <OnsetMark key={mark.x} x={mark.x} y={level} kind={mark.kind} mirrored={mark.mirrored} scale={0.85} />
        ),
      )}
      {strip.running !== null && (
        <path
          d={`M${strip.running} ${tip}l-4.5 -8h9z`}
          fill="var(--color-ink)"
          stroke="var(--color-sheet)"
          strokeWidth="1"
        />
      )}
      <g className="figures" fontSize="11" fill="var(--color-ink-2)">
        <text x="0" y={numbers}>
          {shortFigure(card.control.low)}
        </text>
        <text x={width} y={numbers} textAnchor="end">
          {shortFigure(card.control.high)}
        </text>
      </g>
    </svg>
  )
}
