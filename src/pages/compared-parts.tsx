import type { Page } from '#shared/api/pages.ts'
import { EdgeStrip } from '#src/components/edge-strip.tsx'
import { StateSheet } from '#src/components/state-sheet.tsx'
import { ComparedEquations } from '#src/features/revisions/compared-equations.tsx'
import { ComparedTables } from '#src/features/revisions/compared-tables.tsx'
import { ComparedVerdicts } from '#src/features/revisions/compared-verdicts.tsx'
import { ConsequenceHead } from '#src/features/revisions/consequence-head.tsx'
import { consequenceNote } from '#src/features/revisions/verdict-rows.ts'
import { StabilityCardView } from '#src/features/stability-card/stability-card-view.tsx'
import type { Comparison } from './comparison.ts'
import { useRunningPoint } from './use-running-point.ts'

/** What stands in place of a frozen model of a shape that this page does not know. */
export function NewerKind() {
  return (
    <StateSheet urgent title="This revision is of a newer kind">
      This page was loaded before the library was renewed. Load it again.
    </StateSheet>
  )
}

export function Consequence({ page, compared, verb }: { page: Page; compared: Comparison; verb: string }) {
  const { was, now, cards, unreadable } = compared
  const without = unreadable ? 'unreadable' : page.lastPublic ? 'withdrawn' : 'first'
  return <ConsequenceHead comparison={cards ?? without} verb={verb} note={was && consequenceNote(was, now)} />
}

/** Changed lines in clouds, and everything beside them that differs. */
export function EquationsAndTables({ compared: { was, now } }: { compared: Comparison }) {
  return (
    <>
      <ComparedEquations before={was} after={now} />
      <ComparedTables before={was?.document ?? null} after={now.document} mark={now.mark} />
    </>
  )
}

/** Both branches in one drawing, and the figures of both verdicts. */
export function Verdicts({ compared: { was, now, cards } }: { compared: Comparison }) {
  const [at, setAt] = useRunningPoint()
  const earlier = was ? { document: was.document, card: was.card, label: `revision ${was.mark}` } : null
  return (
    <div className="grid min-w-0 content-start gap-4">
      {was && cards && (
        <section aria-labelledby="verdict-differences" className="sheet min-w-0">
          <h2 id="verdict-differences" className="px-4 py-3 text-subtitle">
            Both verdicts
          </h2>
          <Strips compared={[was, now]} />
          <ComparedVerdicts before={was} after={now} comparison={cards} was={was.mark} now={now.mark} />
        </section>
      )}
      <StabilityCardView
        document={now.document}
        card={now.card}
        state="stored"
        at={at}
        onAt={setAt}
        earlier={earlier}
      />
    </div>
  )
}

/** On a phone, where the drawing is far down: the edges one under the other, to scale. */
function Strips({ compared }: { compared: readonly NonNullable<Comparison['was']>[] }) {
  return (
    <dl className="grid gap-2 border-t border-rule px-4 py-3 tablet:hidden">
      {compared.map(({ mark, revision }) => (
        <div key={mark} className="grid grid-cols-[4.5rem_1fr] items-center">
          <dt className="figures text-note">{mark}</dt>
          <dd>{revision.card && <EdgeStrip card={revision.card} width={264} />}</dd>
        </div>
      ))}
    </dl>
  )
}
