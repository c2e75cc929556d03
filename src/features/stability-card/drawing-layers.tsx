import { pathThrough } from './geometry/points.ts'
import { evenly } from './geometry/resample.ts'
import type { Scene, SceneCurve, SceneNear } from './geometry/scene.ts'
import type { WindowLine } from './geometry/window-line.ts'

/** Points of a drawn curve: on the longest line a step is a few pixels. */
const steps = 241

const hue = { true: 'var(--color-soft)', false: 'var(--color-hard)' } as const

/** Hatch lines leaning to the right, every 6 pixels: stable ground, and nothing else. */
export function HatchPattern({ id }: { id: string }) {
  return (
    <pattern id={id} width="6" height="6" patternUnits="userSpaceOnUse" patternTransform="rotate(45)">
      <path d="M0 0V6" className="card-hatch" />
    </pattern>
  )
}

/** The ground: hatch under every stable piece. The key of `kind` lays it anew, once, when the kind of an onset changes. */
export function Grounds({ scene, hatch, kind }: { scene: Scene; hatch: string; kind: string }) {
  return (
    <g key={kind} className="card-ground">
      {scene.grounds.map((ground) => (
        <path key={ground.key} d={ground.hatch} fill={`url(#${hatch})`} opacity={ground.main ? 1 : 0.75} />
      ))}
      {scene.grounds.flatMap((ground) =>
        ground.edges.map((edge) => (
          <path
            key={`${ground.key} ${edge.path}`}
            d={edge.path}
            fill="none"
            stroke="var(--color-ink)"
            strokeWidth={edge.weight === 'light' ? 1.5 : ground.main && !edge.dashed ? 3 : 2.2}
            strokeDasharray={edge.dashed ? '5 3' : undefined}
            strokeLinejoin="round"
          />
        )),
      )}
    </g>
  )
}

/** Steady states: solid where stable, dashed where not. */
export function Curves({ curves }: { curves: readonly SceneCurve[] }) {
  return (
    <g fill="none" stroke="var(--color-ink)" strokeLinejoin="round">
      {[false, true].flatMap((stable) =>
        curves
          .filter((curve) => curve.stable === stable && curve.path)
          .map((curve) => (
            <path
              key={`${stable} ${curve.id}`}
              className="card-settles"
              d={pathThrough(evenly(curve.points, steps))}
              strokeWidth={stable ? 3.2 : 2.2}
              strokeDasharray={stable ? undefined : '7 5'}
            />
          )),
      )}
    </g>
  )
}

/** The near-onset predictions, paling towards their end: the law holds at the onset and less and less beyond. */
export function NearCurves({ near, id }: { near: readonly SceneNear[]; id: string }) {
  return (
    <g fill="none" strokeLinecap="butt">
      {near.map(({ curve, lines }) => {
        const from = lines[0]?.[0]?.x ?? 0
        const to = lines[0]?.at(-1)?.x ?? from
        const colour = hue[`${curve.stable}`]
        const gradient = `${id}-${curve.hopf}`
        // A gradient over no width paints nothing.
        const fades = Math.abs(to - from) >= 4
        return (
          <g key={curve.hopf}>
            {fades && (
              <linearGradient id={gradient} gradientUnits="userSpaceOnUse" x1={from} x2={to} y1="0" y2="0">
                <stop offset="0.45" stopColor={colour} />
                <stop offset="1" stopColor={colour} stopOpacity="0.25" />
              </linearGradient>
            )}
            {lines.map((line, i) => (
              <path
                key={`${curve.hopf} ${i === 0 ? 'highest' : 'lowest'}`}
                d={pathThrough(line)}
                stroke={fades ? `url(#${gradient})` : colour}
                strokeWidth={curve.stable ? 2.8 : 2.2}
                strokeDasharray={curve.stable ? undefined : '7 5'}
              />
            ))}
          </g>
        )
      })}
    </g>
  )
}

/** What the earlier revision had, in pencil behind. */
export function EarlierLayer({ earlier }: { earlier: NonNullable<Scene['earlier']> }) {
  const paths = [
    ...earlier.curves.map((curve) => ({ key: curve.id, d: curve.path, stable: curve.stable })),
    ...earlier.near.flatMap(({ curve, lines }) =>
      lines.map((line, i) => ({
        key: `near-${curve.hopf}-${i === 0 ? 'highest' : 'lowest'}`,
        d: pathThrough(line),
        stable: curve.stable,
      })),
    ),
  ]
  return (
    <g fill="none" stroke="var(--color-pencil)" strokeWidth="2.2">
      {paths.map(
        (path) => path.d && <path key={path.key} d={path.d} strokeDasharray={path.stable ? undefined : '7 5'} />,
      )}
    </g>
  )
}

const arrow = (x: number, y: number, side: 1 | -1) => `M${x} ${y}l${side * 8} -3.2v6.4z`

/** The dimension line of steady running. An end that is only the end of the sweep has no arrow and no tick. */
export function WindowDimension({ line, bottom }: { line: WindowLine; bottom: number }) {
  const { left, right, y } = line
  const narrow = right - left < 22
  return (
    <g aria-hidden>
      <path d={`M${left} ${y}H${right}`} stroke="var(--color-ink)" strokeWidth="1" />
      {line.leftIsLimit && (
        <>
          <path d={`M${left} ${y - 8}V${bottom}`} stroke="var(--color-line)" strokeWidth="0.75" />
          {!narrow && <path d={arrow(left, y, 1)} fill="var(--color-ink)" />}
        </>
      )}
      {line.rightIsLimit && (
        <>
          <path d={`M${right} ${y - 8}V${bottom}`} stroke="var(--color-line)" strokeWidth="0.75" />
          {!narrow && <path d={arrow(right, y, -1)} fill="var(--color-ink)" />}
        </>
      )}
      <text
        x={line.textX}
        y={line.anchor === 'middle' ? y - 6 : y + 4}
        textAnchor={line.anchor}
        fontSize="13"
        fontWeight="600"
        fill="var(--color-ink)"
        paintOrder="stroke"
        stroke="var(--color-sheet)"
        strokeWidth="4"
      >
        {line.text}
      </text>
    </g>
  )
}
