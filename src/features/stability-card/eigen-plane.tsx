import { useId, useMemo } from 'react'
import type { StabilityCard } from '#shared/model/card-document.ts'
import { OnsetMark } from '#src/components/onset-mark.tsx'
import { axisUnit } from './drawing-axes.tsx'
import { HatchPattern } from './drawing-layers.tsx'
import { type EigenScene, eigenSceneOf } from './geometry/eigen-scene.ts'
import { figure, rateUnit } from './geometry/figures.ts'
import { pathThrough, pixel } from './geometry/points.ts'
import type { CardGeometry } from './geometry/scene.ts'
import type { StateAt } from './geometry/states-at.ts'
import { nameOf } from './geometry/subject.ts'
import { wordsWidth } from './geometry/text-width.ts'

const hues = { soft: 'var(--color-soft)', hard: 'var(--color-hard)', undecided: 'var(--color-open)' } as const

export interface EigenPlaneProps {
  geometry: CardGeometry
  card: StabilityCard
  branch: number
  /** The state of this branch at the running point; null where the branch does not reach it. */
  state: StateAt | null
  width: number
  older: boolean
  labelledBy: string
  describedBy: string
}

function Numbers({ scene, rotation, growth }: { scene: EigenScene; rotation: string; growth: string }) {
  const { plot, x, y } = scene
  return (
    <g aria-hidden>
      {y.ticks.map((tick) => (
        <path
          key={tick.at}
          d={`M${plot.left} ${tick.at}H${plot.right}`}
          stroke="var(--color-pencil)"
          strokeWidth="0.75"
          opacity="0.55"
        />
      ))}
      {x.ticks.map((tick) => (
        <path
          key={tick.at}
          d={`M${tick.at} ${plot.top}V${plot.bottom}`}
          stroke="var(--color-pencil)"
          strokeWidth="0.75"
          opacity="0.55"
        />
      ))}
      <g className="figures" fontSize="11" fill="var(--color-ink)">
        {y.ticks.map((tick) => (
          <text key={tick.at} x={plot.left - 7} y={tick.at + 4} textAnchor="end">
            {tick.text}
          </text>
        ))}
        {x.ticks.map((tick) => (
          <text key={tick.at} x={tick.at} y={plot.bottom + 16} textAnchor="middle">
            {tick.text}
          </text>
        ))}
      </g>
      <path d={`M${plot.left} ${y.toPixel(0)}H${plot.right}`} stroke="var(--color-line)" strokeWidth="0.75" />
      <g fontSize="13" fill="var(--color-ink-2)">
        <text x="2" y="14">
          {rotation}
        </text>
        <text x={plot.right} y={plot.bottom + 34} textAnchor="end">
          {growth}
        </text>
      </g>
    </g>
  )
}

/** The wall: hatched on the stable side. Right of it whatever is there grows. */
function Wall({ scene, hatch }: { scene: EigenScene; hatch: string }) {
  const { plot, wall } = scene
  const words = 'stable side'
  const room = wall - plot.left > wordsWidth(words, 13) + 4
  return (
    <g aria-hidden>
      <rect x={wall - 12} y={plot.top} width="12" height={plot.bottom - plot.top} fill={`url(#${hatch})`} />
      <path d={`M${wall} ${plot.top}V${plot.bottom}`} stroke="var(--color-ink)" strokeWidth="2.4" />
      {room && (
        <text x={wall - 4} y={plot.top - 7} textAnchor="end" fontSize="13" fill="var(--color-ink)">
          {words}
        </text>
      )}
    </g>
  )
}

function Paths({ scene }: { scene: EigenScene }) {
  return (
    <g aria-hidden fill="none">
      {scene.paths.map((path) => (
        <path
          key={path.key}
          className="card-settles"
          d={pathThrough(path.points)}
          stroke={path.look ? hues[path.look] : 'var(--color-ink)'}
          strokeWidth={path.stable ? 2 : 2.2}
          strokeDasharray={path.stable ? undefined : '6 4'}
        />
      ))}
      {scene.dots.map((dot) => (
        <circle
          key={`${dot.x} ${dot.y}`}
          cx={dot.x}
          cy={dot.y}
          r="2.1"
          fill="var(--color-sheet)"
          stroke="var(--color-ink)"
          strokeWidth="1.2"
        />
      ))}
      {scene.arrows.map(({ at, angle }) => (
        <path
          key={`${at.x} ${at.y}`}
          d="M1 0L-8 -3.6V3.6Z"
          transform={`translate(${at.x} ${at.y}) rotate(${pixel(angle)})`}
          fill="var(--color-ink)"
        />
      ))}
      {scene.crossings.map(({ event, at }) => (
        <OnsetMark
          key={`${event.id} ${at.y}`}
          x={at.x}
          y={at.y}
          kind={event.look ?? 'undecided'}
          hollow={event.role === 'none'}
          scale={0.85}
        />
      ))}
    </g>
  )
}

/** The eigenvalues of the running steady state along the sweep: left of the wall everything dies out. */
export function EigenPlane(props: EigenPlaneProps) {
  const { geometry, card, branch, state, width, older, labelledBy, describedBy } = props
  const id = useId()
  const { subject, events, pieces } = geometry
  const scene = useMemo(() => {
    const own = events.filter((event) => event.kind === 'onset' && card.hopf?.[event.index]?.branch === branch)
    const omegas = new Map(
      own.flatMap((event) =>
        card.hopf?.[event.index]?.omega === undefined ? [] : [[event.id, card.hopf[event.index]?.omega ?? 0] as const],
      ),
    )
    return eigenSceneOf(pieces, branch, own, omegas, subject.control, width)
  }, [card, branch, events, pieces, subject, width])
  if (!scene) return <p className="text-note text-ink-2">No eigenvalues along this branch.</p>
  const count = pieces.find((piece) => piece.branch === branch)?.points[0]?.eigenvalues.length ?? 0
  const rate = axisUnit(rateUnit(subject), scene.x)
  const rotation = axisUnit(subject.timeUnit ? `rad/${subject.timeUnit}` : 'rad/time', scene.y)
  return (
    <figure aria-labelledby={labelledBy} aria-describedby={describedBy} className="m-0">
      <svg
        role="img"
        aria-label={`Eigenvalues along the ${nameOf(subject.control)}`}
        width={scene.width}
        height={scene.height}
        viewBox={`0 0 ${scene.width} ${scene.height}`}
        className="block max-w-full"
      >
        <defs>
          <HatchPattern id={`${id}-wall`} />
          <clipPath id={`${id}-plane`}>
            <rect
              x={scene.plot.left}
              y={scene.plot.top}
              width={scene.plot.right - scene.plot.left}
              height={scene.plot.bottom - scene.plot.top}
            />
          </clipPath>
        </defs>
        <Numbers scene={scene} rotation={rotation} growth={`growth rate, ${rate}`} />
        <g className={older ? 'card-older' : undefined}>
          <Wall scene={scene} hatch={`${id}-wall`} />
          <g clipPath={`url(#${id}-plane)`}>
            <Paths scene={scene} />
            {state?.eigenvalues.map((value, k) => (
              <circle
                // biome-ignore lint/suspicious/noArrayIndexKey: the order of the eigenvalues is their identity along the branch
                key={k}
                cx={scene.x.toPixel(value.re)}
                cy={scene.y.toPixel(value.im)}
                r="4.5"
                fill="var(--color-ink)"
                stroke="var(--color-sheet)"
                strokeWidth="1.5"
              />
            ))}
          </g>
        </g>
      </svg>
      <figcaption className="text-label text-ink-2">
        Arrows: {nameOf(subject.control)} rising. Filled: running point.
        {scene.beyond &&
          ` ${scene.beyond.count} of ${count} ${scene.beyond.count === 1 ? 'leaves' : 'leave'} the frame; growth rates from ${figure(scene.beyond.from)} to ${figure(scene.beyond.to)}: see the table.`}
      </figcaption>
    </figure>
  )
}
