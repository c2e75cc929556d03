import { type PointerEvent, useRef } from 'react'
import { controlFigure } from './geometry/figures.ts'
import type { Frame } from './geometry/frame.ts'
import { distanceWords, inRange, movedByKey, nearestLimit, runningWords, snapped } from './geometry/running.ts'
import type { CardGeometry } from './geometry/scene.ts'
import type { StateAt } from './geometry/states-at.ts'
import { nameOf } from './geometry/subject.ts'
import { wordsWidth } from './geometry/text-width.ts'

export interface RunningMarkerProps {
  frame: Frame
  geometry: CardGeometry
  states: readonly StateAt[]
  at: number
  onAt: (at: number) => void
}

/** The dimension line from the running point to the nearest limit of the steady running. */
function Margin({ frame, geometry, at }: Pick<RunningMarkerProps, 'frame' | 'geometry' | 'at'>) {
  const limit = nearestLimit(at, geometry.events)
  if (!limit) return null
  const from = frame.x.toPixel(at)
  const to = frame.x.toPixel(limit.p)
  const y = frame.plot.top + 38
  const side = to > from ? 1 : -1
  const text = distanceWords(at, limit, geometry.subject)
  const short = text.split(' ')[0] ?? ''
  const room = Math.abs(to - from)
  if (room < 26) return null
  const words = wordsWidth(text, 13) + 16 < room ? text : short
  const inside = wordsWidth(words, 13) + 16 < room
  return (
    <g aria-hidden className="pointer-events-none">
      <path d={`M${from} ${y}H${to}`} stroke="var(--color-ink)" strokeWidth="1" />
      <path d={`M${from} ${y}l${side * 8} -3.2v6.4z`} fill="var(--color-ink)" />
      <path d={`M${to} ${y}l${-side * 8} -3.2v6.4z`} fill="var(--color-ink)" />
      <text
        x={inside ? (from + to) / 2 : from - side * 8}
        y={inside ? y - 5 : y + 4}
        textAnchor={inside ? 'middle' : side > 0 ? 'end' : 'start'}
        fontSize="13"
        fill="var(--color-ink)"
        paintOrder="stroke"
        stroke="var(--color-sheet)"
        strokeWidth="4"
      >
        {words}
      </text>
    </g>
  )
}

/**
 * The running point: a plumb line with a dot on every steady state, and a handle under the axis that is dragged or moved by
 * keys. What it stands on is read off the branches, so it answers at once.
 */
export function RunningMarker({ frame, geometry, states, at, onAt }: RunningMarkerProps) {
  const { plot, x, small } = frame
  const { subject, events } = geometry
  const dragging = useRef(false)
  const px = x.toPixel(at)
  const swept = inRange(at, subject)
  const label = `running at ${controlFigure(at, subject)}`
  const width = wordsWidth(label, 13, true)
  const right = px + 14 + width < plot.right + 12
  const move = (event: PointerEvent<SVGGElement>) => {
    const svg = event.currentTarget.ownerSVGElement
    if (!svg) return
    onAt(snapped(x.fromPixel(event.clientX - svg.getBoundingClientRect().left), subject))
  }
  const handle = Math.min(plot.right, Math.max(plot.left, px))
  return (
    <>
      {swept && (
        <path
          aria-hidden
          d={`M${px} ${plot.top + 30}V${plot.bottom}`}
          stroke="var(--color-ink)"
          strokeWidth="1.2"
          strokeDasharray="1.2 4"
          className="pointer-events-none"
        />
      )}
      <Margin frame={frame} geometry={geometry} at={at} />
      <g aria-hidden className="pointer-events-none">
        {swept &&
          states.map((state, i) => (
            <circle
              // biome-ignore lint/suspicious/noArrayIndexKey: two states may share branch and observed value
              key={i}
              cx={px}
              cy={frame.y.toPixel(state.value)}
              r="4.5"
              fill={state.stable ? 'var(--color-ink)' : 'var(--color-sheet)'}
              stroke={state.stable ? 'var(--color-sheet)' : 'var(--color-ink)'}
              strokeWidth={state.stable ? 1.5 : 2}
            />
          ))}
      </g>
      <g
        role="slider"
        tabIndex={0}
        aria-label={`Running point, ${nameOf(subject.control)}`}
        aria-valuemin={subject.control.low}
        aria-valuemax={subject.control.high}
        aria-valuenow={at}
        aria-valuetext={runningWords(at, states, events, subject)}
        className="card-slider cursor-ew-resize touch-none outline-none"
        onKeyDown={(event) => {
          if (event.ctrlKey || event.metaKey || event.altKey) return
          const to = movedByKey(event.key, event.shiftKey, at, subject, events)
          if (to === null) return
          event.preventDefault()
          event.stopPropagation()
          onAt(to)
        }}
        onPointerDown={(event) => {
          if (event.button !== 0) return
          event.currentTarget.setPointerCapture(event.pointerId)
          dragging.current = true
          move(event)
        }}
        onPointerMove={(event) => {
          if (dragging.current) move(event)
        }}
        onPointerUp={() => {
          dragging.current = false
        }}
        onPointerCancel={() => {
          dragging.current = false
        }}
      >
        <rect
          x={plot.left}
          y={plot.bottom - 6}
          width={plot.right - plot.left}
          height={small ? 44 : 34}
          fill="transparent"
        />
        <g transform={`translate(${handle} ${plot.bottom})`}>
          <path className="card-slider-halo" d="M0 -8L13 2V32H-13V2Z" fill="var(--color-pencil)" opacity="0" />
          <path
            className="card-slider-ring"
            d="M0 -4L10.5 5.5V28.5H-10.5V5.5Z"
            fill="var(--color-sheet)"
            stroke="var(--color-ink)"
            strokeWidth="2"
            opacity="0"
          />
          <path d="M0 1L7 8V25H-7V8Z" fill="var(--color-ink)" opacity={swept ? 1 : 0.45} />
          <path d="M-2 13.5v6M2 13.5v6" stroke="var(--color-sheet)" strokeWidth="1.4" />
        </g>
        <text
          aria-hidden
          x={right ? handle + 13 : handle - 13}
          y={plot.bottom + 35}
          textAnchor={right ? 'start' : 'end'}
          fontSize="13"
          fontWeight="600"
          fill="var(--color-ink)"
        >
          {label}
        </text>
      </g>
    </>
  )
}
