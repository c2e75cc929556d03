import type { StabilityCard } from '#shared/model/card-document.ts'
import { sameSymbol } from '#shared/stability/summary.ts'
import { ModelSymbol } from '#src/components/symbol.tsx'
import { Cell, Row, Table, TableHead } from '#src/components/table.tsx'
import { FigureText } from './figure-text.tsx'
import type { Complex } from './geometry/eigen-paths.ts'
import { eigenTexts } from './geometry/eigen-text.ts'
import { controlFigure, figure, rateUnit } from './geometry/figures.ts'
import { inRange } from './geometry/running.ts'
import type { StateAt } from './geometry/states-at.ts'
import type { Subject } from './geometry/subject.ts'

interface Listed {
  key: string
  state: Readonly<Record<string, number>>
  eigenvalues: readonly Complex[]
  stable: boolean
  kind: string
}

export interface SteadyStatesProps {
  card: StabilityCard
  subject: Subject
  at: number
  /** Read off the branches at `at`. */
  states: readonly StateAt[]
  /** Computed for `at` itself; null until it is, or where nobody computes it. */
  exact: { p: number; steadyStates: NonNullable<StabilityCard['steadyStates']>; complete: boolean } | null
  headingId: string
}

/** Beyond so many states of the model a row names the observed one only. */
const namedStates = 4

function StateValues({ state, subject }: { state: Listed['state']; subject: Subject }) {
  const shown =
    subject.states.length <= namedStates
      ? subject.states
      : subject.states.filter((row) => sameSymbol(row.symbol, subject.observed.symbol)).slice(0, 1)
  const rows = shown.length > 0 ? shown : subject.states.slice(0, namedStates)
  const rest = subject.states.filter((row) => !rows.includes(row))
  const value = (row: Subject['states'][number]) => (
    <span key={row.symbol} className="mr-3 inline-block whitespace-nowrap">
      <ModelSymbol name={row.symbol} /> ={' '}
      <span className="figures text-note">
        <FigureText text={figure(state[row.symbol] ?? 0, 4)} />
      </span>
      {row.unit && ` ${row.unit}`}
    </span>
  )
  return (
    <>
      {rows.map(value)}
      {rest.length > 0 && (
        <details className="text-label">
          <summary className="cursor-pointer text-ink-2">{rest.length} more states</summary>
          {rest.map(value)}
        </details>
      )}
    </>
  )
}

/** Every steady state at the running point with all its eigenvalues and its kind. */
export function SteadyStates({ card, subject, at, states, exact, headingId }: SteadyStatesProps) {
  const own = at === subject.control.value && card.steadyStates
  const computed = own
    ? { steadyStates: own, complete: card.steadyStatesComplete ?? false }
    : exact?.p === at
      ? exact
      : null
  const listed: Listed[] = computed
    ? computed.steadyStates.map((state, i) => ({ key: String(i), ...state }))
    : states.map((state) => ({
        key: `${state.branch} ${state.value}`,
        ...state,
        kind: state.stable ? 'stable' : 'unstable',
      }))
  const source = computed
    ? computed.complete
      ? 'Computed here. Proved: the ranges of the states hold no other.'
      : 'Computed here. Searched, not proved: there may be others.'
    : 'Read between computed points of the branches.'
  return (
    <section aria-labelledby={headingId} className="min-w-0">
      <h3 id={headingId} className="font-[640]">
        Steady states at{' '}
        {subject.control.meaning ? (
          `${subject.control.meaning} `
        ) : (
          <>
            <ModelSymbol name={subject.control.symbol} /> ={' '}
          </>
        )}
        <span className="figures font-[620]">{controlFigure(at, subject)}</span>
        {subject.control.unit && ` ${subject.control.unit}`}
      </h3>
      {listed.length === 0 ? (
        <p className="py-2 text-note text-ink-2">
          {computed || inRange(at, subject)
            ? 'None in the ranges of the states.'
            : 'Outside the range that was swept: not computed.'}
        </p>
      ) : (
        <Table caption="Steady states at the running point" className="mt-1">
          <TableHead columns={['Steady state', 'Kind', `Eigenvalues, ${rateUnit(subject)}`]} />
          <tbody>
            {listed.map((state) => (
              <Row key={state.key}>
                <Cell className="align-top">
                  <StateValues state={state.state} subject={subject} />
                </Cell>
                <Cell className={`align-top ${state.stable ? 'font-[620]' : ''}`}>{state.kind}</Cell>
                <Cell className="figures align-top text-note">
                  {eigenTexts(state.eigenvalues).map(({ text }, i) => (
                    // biome-ignore lint/suspicious/noArrayIndexKey: equal eigenvalues are told apart by nothing else
                    <span key={`${text} ${i}`} className="mr-4 inline-block whitespace-nowrap">
                      {text}
                    </span>
                  ))}
                </Cell>
              </Row>
            ))}
          </tbody>
        </Table>
      )}
      {(computed || listed.length > 0) && <p className="mt-1 text-label text-ink-2">{source}</p>}
    </section>
  )
}
