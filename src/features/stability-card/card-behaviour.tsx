import { type ReactNode, useMemo, useState } from 'react'
import type { StabilityCard } from '#shared/model/card-document.ts'
import { classes } from '#src/lib/class-names.ts'
import { BranchTable, EigenTable } from './branch-table.tsx'
import { CardWarnings } from './card-warnings.tsx'
import { Drawing } from './drawing.tsx'
import { DrawingKey } from './drawing-key.tsx'
import { EigenPlane } from './eigen-plane.tsx'
import { drawingSentences } from './geometry/describe.ts'
import { growthReadout, limitReadouts, onsetReadouts, sameOnset } from './geometry/readouts.ts'
import { nearestLimit } from './geometry/running.ts'
import type { CardGeometry } from './geometry/scene.ts'
import { shownBranch } from './geometry/shown-branch.ts'
import { statesAt } from './geometry/states-at.ts'
import { nameOf } from './geometry/subject.ts'
import { PointList } from './point-list.tsx'
import { Readouts } from './readouts.tsx'
import { SteadyStates, type SteadyStatesProps } from './steady-states.tsx'
import { useWidth } from './use-width.ts'
import { ViewSwitch } from './view-switch.tsx'

export interface CardBehaviourProps {
  id: string
  card: StabilityCard
  geometry: CardGeometry
  earlier: { geometry: CardGeometry; label: string } | null
  earlierCard: StabilityCard | null
  /** Position in the card's onsets of the one the headline speaks of. */
  main: number | null
  at: number
  onAt: (at: number) => void
  lit: string | null
  onLit: (id: string | null) => void
  older: boolean
  exact: SteadyStatesProps['exact']
  acts: ReactNode
}

/** Everything under the verdict: drawing, eigenvalues, list, numbers, steady states, warnings. */
export function CardBehaviour(props: CardBehaviourProps) {
  const { id, card, geometry, earlier, earlierCard, main, at, onAt, lit, onLit, older, exact, acts } = props
  const { subject, events, pieces } = geometry
  const [picture, setPicture] = useState<'drawing' | 'table'>('drawing')
  const [plane, setPlane] = useState<'drawing' | 'table'>('drawing')
  const [drawingRef, drawingWidth] = useWidth<HTMLDivElement>(620)
  const [planeRef, planeWidth] = useWidth<HTMLDivElement>(280)
  const states = useMemo(() => statesAt(pieces, at), [pieces, at])
  const sentences = useMemo(() => drawingSentences(geometry), [geometry])
  const branch = shownBranch(card, states)
  const running =
    states.find((state) => state.branch === branch && state.stable) ??
    states.find((state) => state.branch === branch) ??
    null
  const chosen = events.find((event) => event.id === lit && event.kind === 'onset')?.index ?? main
  const point = chosen === null ? null : (card.hopf?.[chosen] ?? null)
  const before = point && earlierCard ? sameOnset(point, earlierCard.hopf ?? []) : null
  const limit = nearestLimit(at, events)
  const words = older ? 'card-older-words' : undefined
  const ofLimit = point ? onsetReadouts(point, before, at, subject) : limit ? limitReadouts(limit, at, subject) : []
  const readouts = [...ofLimit, growthReadout(running, at, subject)]
  return (
    <div className="grid min-w-0 gap-x-6 gap-y-5 @min-[860px]:grid-cols-[minmax(0,1fr)_300px] @min-[1180px]:grid-cols-[minmax(0,780px)_minmax(0,1fr)]">
      <div className="grid min-w-0 content-start gap-3">
        <div ref={drawingRef} className="relative min-w-0">
          <h3 id={`${id}-drawing`} className="sr-only">
            Drawing of {nameOf(subject.observed)} against {nameOf(subject.control)}
          </h3>
          <div className={picture === 'drawing' ? 'absolute -top-3 right-0 bench:-top-2' : 'mb-2 flex justify-end'}>
            <ViewSwitch label="Drawing or table" value={picture} onChange={setPicture} shortcut="t" />
          </div>
          {picture === 'drawing' ? (
            <Drawing
              geometry={geometry}
              card={card}
              earlier={earlier}
              width={drawingWidth}
              at={at}
              onAt={onAt}
              states={states}
              lit={lit}
              onLit={onLit}
              older={older}
              labelledBy={`${id}-drawing`}
              describedBy={`${id}-sentence ${id}-curves`}
            />
          ) : (
            <BranchTable geometry={geometry} older={older} />
          )}
        </div>
        <div id={`${id}-curves`} className="sr-only">
          {sentences.map((sentence) => (
            <p key={sentence}>{sentence}</p>
          ))}
        </div>
        {picture === 'drawing' && (
          <div className={words}>
            <DrawingKey geometry={geometry} earlierLabel={earlier?.label ?? null} />
          </div>
        )}
        {acts}
        <Readouts
          readouts={readouts}
          label="Numbers of the onset and of the running point"
          older={older}
          wide={drawingWidth >= 860}
        />
      </div>
      <div className="grid min-w-0 content-start gap-5 @min-[620px]:grid-cols-2 @min-[860px]:grid-cols-1">
        <section aria-labelledby={`${id}-eigen`} className="min-w-0">
          <header className="flex flex-wrap items-baseline justify-between gap-2">
            <h3 id={`${id}-eigen`} className="font-[640]">
              Eigenvalues
            </h3>
            <ViewSwitch label="Eigenvalues as drawing or table" value={plane} onChange={setPlane} />
          </header>
          <div ref={planeRef} className="mt-1 min-w-0">
            {plane === 'drawing' ? (
              <EigenPlane
                geometry={geometry}
                card={card}
                branch={branch}
                state={running}
                width={planeWidth}
                older={older}
                labelledBy={`${id}-eigen`}
                describedBy={`${id}-curves`}
              />
            ) : (
              <EigenTable geometry={geometry} branch={branch} />
            )}
          </div>
        </section>
        <div className={words}>
          <PointList events={events} subject={subject} at={at} lit={lit} onLit={onLit} headingId={`${id}-list`} />
        </div>
      </div>
      <div className={classes('grid min-w-0 gap-5 @min-[860px]:col-span-2', words)}>
        <SteadyStates card={card} subject={subject} at={at} states={states} exact={exact} headingId={`${id}-states`} />
        <CardWarnings warnings={card.warnings} headingId={`${id}-warnings`} />
      </div>
    </div>
  )
}
