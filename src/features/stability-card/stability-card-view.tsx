import './stability-card.css'
import { useId, useMemo, useState } from 'react'
import type { StabilityCard } from '#shared/model/card-document.ts'
import type { ModelError } from '#shared/model/errors.ts'
import { verdictWords } from '#shared/stability/sentences.ts'
import { type DescribedModel, summarise } from '#shared/stability/summary.ts'
import { Button } from '#src/components/button.tsx'
import { decimalMark } from '#src/lib/decimal-mark.ts'
import { clockOf } from '#src/lib/times.ts'
import { CardBehaviour } from './card-behaviour.tsx'
import { EmptyDrawing, FaultNote } from './card-state.tsx'
import { geometryOf } from './geometry/scene.ts'
import { useAnnouncedVerdict } from './use-announced-verdict.ts'
import { useDelayed } from './use-delayed.ts'
import { useShownPoint } from './use-shown-point.ts'
import { VerdictHead } from './verdict-head.tsx'

type PageDocument = DescribedModel & { quietWord?: string }

export interface StabilityCardViewProps {
  /** The document the card was computed from: while `state` is older, not the one being typed. */
  document: PageDocument | null
  card: StabilityCard | null
  /**
   * `stored`: of a revision. `live`: of the equations as they stand. `computing`: a run is under way, the card shown is of
   * the equations before. `older`: the equations as they stand cannot be computed.
   */
  state: 'live' | 'computing' | 'older' | 'stored'
  errors?: readonly ModelError[]
  /** When the card shown was computed, ISO 8601. */
  computedAt?: string | null
  /** What went wrong with the computation itself, in words ("The calculation stopped answering and was started again."). */
  trouble?: string | null
  /** The viewer's running point; null is the page's own value. */
  at: number | null
  onAt: (at: number | null) => void
  /** Writes the running point into the model's parameter. Offered only where it is given and `mayEdit` holds. */
  onSetValue?: (value: number) => void
  mayEdit?: boolean
  /** Another card of the page, drawn in pencil behind. */
  earlier?: { document: PageDocument; card: StabilityCard; label: string } | null
  /** Steady states computed for the running point itself, where somebody computes them. */
  exact?: { p: number; steadyStates: NonNullable<StabilityCard['steadyStates']>; complete: boolean } | null
  level?: 1 | 2 | 3
}

/** Runs shorter than this change the words only, so that the picture does not flicker at every key. */
const greyAfter = 250

/**
 * The stability card of a model: verdict first, then the drawing, the eigenvalues, the numbers, and the table behind each
 * picture. It only shows: nothing is computed here but the reading of branches between their points.
 */
export function StabilityCardView(props: StabilityCardViewProps) {
  const { document, card, state, errors = [], computedAt = null, trouble = null } = props
  const id = useId()
  return (
    <section aria-label="Stability card" className="sheet @container grid min-w-0 content-start gap-4 p-4 tablet:p-5">
      {trouble && <p className="rounded-control border-[1.5px] border-ink px-3 py-2 text-note">{trouble}</p>}
      {errors.length > 0 && <FaultNote errors={errors} keeps={card && computedAt ? clockOf(computedAt) : null} />}
      {document && card ? (
        <Shown {...props} document={document} card={card} id={id} />
      ) : (
        <>
          <h2 className="text-title text-ink-2">The verdict stands here</h2>
          <EmptyDrawing
            words={
              state === 'computing'
                ? 'The first run is under way'
                : errors.length > 0
                  ? 'it is computed as soon as the faults are settled'
                  : 'two lines of equations are enough to fill it'
            }
          />
        </>
      )}
    </section>
  )
}

function Shown(props: StabilityCardViewProps & { document: PageDocument; card: StabilityCard; id: string }) {
  const { document, card, state, computedAt = null, onSetValue, mayEdit = false, earlier = null, level = 2, id } = props
  const geometry = useMemo(() => geometryOf(document, card), [document, card])
  const words = useMemo(() => verdictWords(card, document, { decimalMark }), [card, document])
  const main = useMemo(() => summarise(document, card).main, [document, card])
  const earlierGeometry = useMemo(
    () => (earlier ? { geometry: geometryOf(earlier.document, earlier.card), label: earlier.label } : null),
    [earlier],
  )
  const own = geometry.subject.control.value
  const [at, onAt] = useShownPoint(props.at ?? own, props.onAt)
  const [lit, setLit] = useState<string | null>(null)
  useAnnouncedVerdict(words, state !== 'stored')
  const late = useDelayed(state === 'computing', greyAfter)
  const older = state === 'older' || late
  const from = computedAt ? `from ${clockOf(computedAt)}, older` : 'older than the equations'
  const note = state === 'older' || late ? from : state === 'computing' ? 'computing' : null
  return (
    <>
      <VerdictHead
        card={card}
        words={words}
        earlier={earlier}
        note={note}
        older={older}
        headingId={`${id}-verdict`}
        sentenceId={`${id}-sentence`}
        level={level}
      />
      <CardBehaviour
        id={id}
        card={card}
        geometry={geometry}
        earlier={earlierGeometry}
        earlierCard={earlier?.card ?? null}
        main={main}
        at={at}
        onAt={onAt}
        lit={lit}
        onLit={setLit}
        older={older}
        exact={props.exact ?? null}
        acts={
          // Always as high, so that nothing below moves when the running point does.
          <div className="flex min-h-11 flex-wrap items-center gap-2 bench:min-h-8">
            {at === own ? (
              <span className="text-note text-ink-2">Running at the page's own value.</span>
            ) : (
              <>
                <Button onClick={() => props.onAt(null)}>Back to the page's value</Button>
                {mayEdit && onSetValue && <Button onClick={() => onSetValue(at)}>Set as the page's value</Button>}
              </>
            )}
          </div>
        }
      />
    </>
  )
}
