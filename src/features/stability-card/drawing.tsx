import { memo, useId, useMemo, useRef } from 'react'
import type { StabilityCard } from '#shared/model/card-document.ts'
import { Axes } from './drawing-axes.tsx'
import { Curves, EarlierLayer, Grounds, HatchPattern, NearCurves, WindowDimension } from './drawing-layers.tsx'
import { Labels, Marks } from './drawing-marks.tsx'
import { type DrawnLabel, labelsOf } from './geometry/labels.ts'
import { type CardGeometry, type Scene, sceneOf } from './geometry/scene.ts'
import type { StateAt } from './geometry/states-at.ts'
import { wordsWidth } from './geometry/text-width.ts'
import { windowLine } from './geometry/window-line.ts'
import { RunningMarker } from './running-marker.tsx'

export interface DrawingProps {
  geometry: CardGeometry
  card: StabilityCard
  earlier: { geometry: CardGeometry; label: string } | null
  width: number
  at: number
  onAt: (at: number) => void
  states: readonly StateAt[]
  lit: string | null
  onLit: (id: string | null) => void
  /** The verdict is older than the equations: the picture stands back. */
  older: boolean
  labelledBy: string
  describedBy: string
}

/** The label of the earlier revision, at the end of its own line. */
function EarlierLabel({ scene, label }: { scene: Scene; label: string }) {
  const lines = scene.earlier?.near.flatMap((curve) => curve.lines.slice(0, 1)) ?? []
  const line = lines[0] ?? scene.earlier?.curves.find((curve) => curve.points.length > 1)?.points
  const end = line?.at(-1)
  if (!end) return null
  const { plot } = scene.frame
  const beside = plot.right - end.x > wordsWidth(label, 13) + 10
  return (
    <text
      x={beside ? end.x + 6 : plot.right - 4}
      y={beside ? end.y + 4 : Math.max(plot.top + 60, end.y - 8)}
      textAnchor={beside ? 'start' : 'end'}
      fontSize="13"
      fill="var(--color-ink-2)"
      paintOrder="stroke"
      stroke="var(--color-sheet)"
      strokeWidth="4"
    >
      {label}
    </text>
  )
}

/** The kinds of the onsets in order: the ground is laid anew when they change, and settles when only numbers do. */
const kindsOf = ({ events }: CardGeometry) => events.map((event) => `${event.kind} ${event.look} ${event.role}`).join()

interface StaticProps {
  scene: Scene
  card: StabilityCard
  earlierLabel: string | null
  lit: string | null
  onLit: (id: string | null) => void
}

/** Everything that does not move with the running point. */
const StaticLayers = memo(function StaticLayers({ scene, card, earlierLabel, lit, onLit }: StaticProps) {
  const id = useId()
  const window = useMemo(
    () => windowLine(card, scene.geometry.subject, scene.geometry.events, scene.frame),
    [card, scene],
  )
  // What was placed last time is only a hint that keeps labels from hopping; the picture is right without it.
  const last = useRef<{ kinds: string; labels: DrawnLabel[] }>({ kinds: '', labels: [] })
  const kinds = kindsOf(scene.geometry)
  const labels = useMemo(() => {
    const placed = labelsOf(scene, window, last.current.kinds === kinds ? last.current.labels : [])
    last.current = { kinds, labels: placed }
    return placed
  }, [scene, window, kinds])
  const { plot } = scene.frame
  return (
    <>
      <defs>
        <HatchPattern id={`${id}-ground`} />
        <clipPath id={`${id}-plot`}>
          <rect x={plot.left} y={plot.top - 4} width={plot.right - plot.left} height={plot.bottom - plot.top + 4} />
        </clipPath>
      </defs>
      {window && <WindowDimension line={window} bottom={plot.bottom} />}
      <g aria-hidden clipPath={`url(#${id}-plot)`}>
        {scene.earlier && <EarlierLayer earlier={scene.earlier} />}
        <Grounds scene={scene} hatch={`${id}-ground`} kind={kinds} />
        <NearCurves near={scene.near} id={`${id}-near`} />
        <Curves curves={scene.curves} />
        {earlierLabel && <EarlierLabel scene={scene} label={earlierLabel} />}
      </g>
      <Labels labels={labels} />
      <Marks marks={scene.marks} unit={scene.geometry.subject.control.unit} lit={lit} onLit={onLit} />
    </>
  )
})

/**
 * The main drawing: the observed quantity against the control. A stable steady state stands on hatched ground, an unstable
 * one is dashed; every onset, turning point and branch point is marked and named; the running point can be moved.
 */
export function Drawing(props: DrawingProps) {
  const { geometry, card, earlier, width, at, onAt, states, lit, onLit, older, labelledBy, describedBy } = props
  const scene = useMemo(
    () => sceneOf(geometry, card, width, earlier?.geometry ?? null),
    [geometry, card, width, earlier?.geometry],
  )
  const { frame } = scene
  const { subject } = geometry
  const lowest = frame.plot.bottom - (frame.depth + 6)
  return (
    <figure aria-labelledby={labelledBy} aria-describedby={describedBy} className="m-0">
      <svg
        role="group"
        aria-labelledby={labelledBy}
        width={frame.width}
        height={frame.height}
        viewBox={`0 0 ${frame.width} ${frame.height}`}
        className="block max-w-full select-none"
      >
        <Axes
          frame={frame}
          control={subject.control}
          observed={subject.observed}
          flat={geometry.flat}
          swings={geometry.near.length > 0}
          lowest={lowest}
          runningX={frame.x.toPixel(at)}
        />
        <g className={older ? 'card-older' : undefined}>
          <StaticLayers scene={scene} card={card} earlierLabel={earlier?.label ?? null} lit={lit} onLit={onLit} />
        </g>
        {geometry.pieces.length === 0 && (
          <text
            x={(frame.plot.left + frame.plot.right) / 2}
            y={(frame.plot.top + frame.plot.bottom) / 2}
            textAnchor="middle"
            fontSize="15"
            fill="var(--color-ink-2)"
            paintOrder="stroke"
            stroke="var(--color-sheet)"
            strokeWidth="6"
          >
            no steady state anywhere in the range
          </text>
        )}
        <RunningMarker frame={frame} geometry={geometry} states={states} at={at} onAt={onAt} />
      </svg>
    </figure>
  )
}
