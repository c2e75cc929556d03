import { OnsetMark } from '#src/components/onset-mark.tsx'
import { type CardEvent, roleWord } from './geometry/events.ts'
import { withUnit } from './geometry/figures.ts'
import type { DrawnLabel, LabelHue } from './geometry/labels.ts'
import { labelSize } from './geometry/place-labels.ts'
import { type Point, pathThrough } from './geometry/points.ts'

const hues: Record<LabelHue, string> = {
  soft: 'var(--color-soft)',
  hard: 'var(--color-hard)',
  undecided: 'var(--color-open)',
  ink: 'var(--color-ink)',
  quiet: 'var(--color-ink-2)',
}

/** The picture of an event, centred on (0, 0): used on the drawing, in the eigenvalue plane and in the list. */
export function EventShape({ event }: { event: Pick<CardEvent, 'kind' | 'look' | 'role' | 'mirrored'> }) {
  if (event.kind === 'onset' && event.look) {
    return <OnsetMark x={0} y={0} kind={event.look} mirrored={event.mirrored} hollow={event.role === 'none'} />
  }
  return (
    <>
      <circle r="5" fill="var(--color-sheet)" stroke="var(--color-ink)" strokeWidth="2" />
      {event.kind === 'branch-point' && <circle r="1.6" fill="var(--color-ink)" />}
    </>
  )
}

/** "Hard onset at 58.00 m/s, 2.32 Hz, 14.6 rad/s, limit". */
export const eventWords = (event: CardEvent, unit: string): string =>
  `${event.name} at ${withUnit(event.text, unit)}, ${event.detail}, ${roleWord(event)}`

/** The marks, lowest value first in the order of Tab. A mark that is lit wears a ring, like its row in the list. */
export function Marks({
  marks,
  unit,
  lit,
  onLit,
}: {
  marks: readonly { event: CardEvent; at: Point }[]
  unit: string
  lit: string | null
  onLit: (id: string | null) => void
}) {
  return marks.map(({ event, at }) => {
    const isLit = lit === event.id
    return (
      <g
        key={event.id}
        role="button"
        tabIndex={0}
        aria-label={eventWords(event, unit)}
        aria-pressed={isLit}
        className="card-mark card-settles cursor-pointer outline-none"
        transform={`translate(${at.x} ${at.y})`}
        onClick={() => onLit(isLit ? null : event.id)}
        onKeyDown={(key) => {
          if (key.key !== 'Enter' && key.key !== ' ') return
          key.preventDefault()
          onLit(isLit ? null : event.id)
        }}
      >
        <circle r="14" fill="transparent" />
        <circle
          className="card-mark-ring"
          r="12"
          fill="var(--color-pencil-tint)"
          stroke="var(--color-ink)"
          strokeWidth="2"
          opacity={isLit ? 1 : 0}
        />
        <EventShape event={event} />
      </g>
    )
  })
}

/** Labels with a halo of the sheet, leaders and dots. The words stand again in the list and in the description. */
export function Labels({ labels }: { labels: readonly DrawnLabel[] }) {
  return (
    <g aria-hidden className="pointer-events-none">
      {labels.map((label) => {
        const colour = hues[label.hue]
        return (
          <g key={label.id}>
            {label.leader && <path d={pathThrough(label.leader)} fill="none" stroke={colour} strokeWidth="1" />}
            {label.dot && <circle cx={label.dot.x} cy={label.dot.y} r="2.2" fill={colour} />}
            {label.lines.map((line, i) => (
              <text
                key={line}
                x={label.x}
                y={label.baselines[i]}
                textAnchor={label.anchor}
                fontSize={labelSize}
                fontWeight={i === 0 ? 600 : 400}
                fill={i === 0 ? colour : 'var(--color-ink-2)'}
                paintOrder="stroke"
                stroke="var(--color-sheet)"
                strokeWidth="4"
                strokeLinejoin="round"
              >
                {line}
              </text>
            ))}
          </g>
        )
      })}
    </g>
  )
}
