import type { CardEvent } from './events.ts'
import { type LabelRequest, type PlacedLabel, placeLabels } from './place-labels.ts'
import { type Box, boxAround, distance, type Point } from './points.ts'
import type { Scene, SceneNear } from './scene.ts'
import type { WindowLine } from './window-line.ts'

export type LabelHue = 'soft' | 'hard' | 'undecided' | 'ink' | 'quiet'
export type DrawnLabel = PlacedLabel & { hue: LabelHue }

const markRadius = 7

function hueOf(event: CardEvent): LabelHue {
  if (event.kind !== 'onset') return 'ink'
  return event.role === 'none' ? 'quiet' : (event.look ?? 'ink')
}

const roleOrder = { limit: 0, other: 1, none: 2 } as const

/** Limits first, nearest to the running point before the others; then what limits other states; then the rest. */
function inOrder(scene: Scene): Scene['marks'] {
  const { value } = scene.geometry.subject.control
  return [...scene.marks].sort(
    (a, b) =>
      roleOrder[a.event.role] - roleOrder[b.event.role] ||
      Math.abs(a.event.p - value) - Math.abs(b.event.p - value) ||
      a.event.value - b.event.value,
  )
}

const lowerFirst = (text: string) => text.charAt(0).toLowerCase() + text.slice(1)

/** Where a line is told what it is: seven tenths along it. */
const placeOn = (line: readonly Point[]): Point | undefined => line[Math.floor((line.length - 1) * 0.7)]

function curveRequests(scene: Scene): (LabelRequest & { hue: LabelHue })[] {
  const { value } = scene.geometry.subject.control
  const gap = ({ curve }: SceneNear) => Math.abs((curve.points[0]?.p ?? value) - value)
  const nearest = [...scene.near].sort((a, b) => gap(a) - gap(b))
  // Said once for each kind, at the one nearest to the running point: the key says it of all.
  const told = nearest.filter((one, i) => nearest.findIndex((other) => other.curve.stable === one.curve.stable) === i)
  const predictions = told.flatMap(({ curve, lines }) => {
    const at = lines[0] && placeOn(lines[0])
    const hue = curve.stable ? ('soft' as const) : ('hard' as const)
    return at ? [{ id: `near-${curve.hopf}`, at, radius: 0, title: 'near-onset prediction', hue }] : []
  })
  const others = scene.grounds.flatMap((ground) => {
    const curve = scene.curves.find((candidate) => candidate.id === ground.key)
    const at = curve?.points[Math.floor(curve.points.length / 2)]
    const width = curve ? Math.abs((curve.points.at(-1)?.x ?? 0) - (curve.points[0]?.x ?? 0)) : 0
    if (ground.main || !at || width < 60) return []
    return [{ id: `ground-${ground.key}`, at, radius: 0, title: 'also stable', hue: 'ink' as const }]
  })
  const hasMain = scene.grounds.some((ground) => ground.main)
  return [...predictions, ...(hasMain ? others : [])]
}

/** The strip at the top where dimension lines stand: that of steady running, and that of the running point, which moves. */
function dimensions({ frame: { plot } }: Scene, window: WindowLine): Box[] {
  return [window.box, { left: plot.left, right: plot.right, top: plot.top, bottom: plot.top + 46 }]
}

/**
 * The labels of the main drawing. They do not depend on the running point, which may be dragged: its own words stand under
 * the axis.
 */
export function labelsOf(scene: Scene, window: WindowLine | null, previous: readonly PlacedLabel[] = []): DrawnLabel[] {
  // One spot may carry several events (states that do not differ in the observed quantity): equal words stand there once.
  const told = inOrder(scene).filter(
    ({ event, at }, i, all) =>
      all.findIndex((other) => other.event.name === event.name && distance(other.at, at) < 4) === i,
  )
  const marks = told.map(({ event, at }) => ({
    id: event.id,
    at,
    radius: markRadius,
    title: `${lowerFirst(event.name)} ${event.text}`,
    detail: event.brief,
    short: event.text,
    hue: hueOf(event),
  }))
  const requests = [...marks, ...curveRequests(scene)]
  const placed = placeLabels(
    requests,
    {
      curves: scene.lines,
      boxes: [
        ...scene.marks.map((mark) => boxAround(mark.at, markRadius)),
        ...(window ? dimensions(scene, window) : []),
      ],
      plot: scene.frame.plot,
    },
    previous,
  )
  return placed.map((label) => ({ ...label, hue: requests.find((request) => request.id === label.id)?.hue ?? 'ink' }))
}
