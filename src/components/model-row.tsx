import { Link } from 'react-router-dom'
import type { PageRow } from '#shared/api/pages.ts'
import { frequencyText, onsetText, otherLimit, standsOnGround, unitText } from '#src/lib/onset-figures.ts'
import { rowNote } from '#src/lib/row-note.ts'
import { momentWithOffset } from '#src/lib/times.ts'
import { EdgeStrip } from './edge-strip.tsx'
import { OnsetWord } from './onset-glyph.tsx'
import { SignatureStrip, StateWord } from './signature-strip.tsx'
import { ModelSymbol } from './symbol.tsx'

/** The columns' names above the rows; each row says them again for those who do not see the columns. */
export function ModelRowHead({ beside = false }: { beside?: boolean }) {
  return (
    <div aria-hidden className={`model-row model-row-head text-label text-ink-2 ${beside ? 'beside' : ''}`}>
      <span className="of-strip">Edge, to scale</span>
      <span className="of-name">Model</span>
      <span className="of-kind">Onset</span>
      <span className="of-value">Loses stability at</span>
      <span className="of-frequency">Frequency</span>
      <span className="of-state">State</span>
    </div>
  )
}

/** A model in a list: edge strip, name, onset, value, frequency, state. `beside`: narrower columns, next to another sheet. */
export function ModelRow({
  row,
  showGroup = true,
  beside = false,
}: {
  row: PageRow
  showGroup?: boolean
  beside?: boolean
}) {
  const { card } = row
  const note = rowNote(row)
  return (
    <li className={`model-row ${beside ? 'beside' : ''}`}>
      <div className="of-name min-w-0">
        <Link to={`/m/${row.code}`} className="covers block min-h-6 font-[640] text-ink no-underline wrap-anywhere">
          {row.title}
        </Link>
        <p className="text-note text-ink-2">
          <span className="figures mr-2.5 text-label text-ink">{row.code}</span>
          {showGroup && row.group.name}
        </p>
        {note !== null && <p className="text-note font-[600]">{note}</p>}
      </div>
      <div className="of-strip min-w-0">
        {card ? (
          <EdgeStrip card={card} width={beside ? 168 : 202} faded={row.state === 'withdrawn'} />
        ) : (
          <p className="text-note text-ink-2">No verdict yet</p>
        )}
      </div>
      <div className="of-kind">{card && <Kind card={card} />}</div>
      <div className="of-value min-w-0">{card && <Value card={card} />}</div>
      <div className="of-frequency">{card && <Frequency card={card} />}</div>
      <div className="of-state" title={`Changed ${momentWithOffset(row.changedAt)}`}>
        <span className="bench:hidden">
          <SignatureStrip state={row.state} named />
        </span>
        <span className="hidden bench:block">
          <StateWord state={row.state} />
          <span className="block text-note text-ink-2">{row.mark === null ? 'not yet issued' : row.mark}</span>
        </span>
      </div>
    </li>
  )
}

type Card = NonNullable<PageRow['card']>

/** A page without an onset that loses its steady running all the same must not look like firm ground. */
function Kind({ card }: { card: Card }) {
  if (card.kind !== 'none') return <OnsetWord kind={card.kind} />
  const other = otherLimit(card)
  if (other) return <OnsetWord kind="undecided" word={capital(other.word)} />
  if (!standsOnGround(card)) return <OnsetWord kind="undecided" word="Not steady" />
  return <OnsetWord kind="none" />
}

const capital = (word: string) => word.charAt(0).toUpperCase() + word.slice(1)

function Value({ card }: { card: Card }) {
  const onset = card.main === null ? undefined : card.onsets[card.main]
  const figure = onset ? onsetText(onset) : (otherLimit(card)?.text ?? null)
  return (
    <>
      <p>
        <span className="sr-only">Loses stability at </span>
        <span className="figures text-[1.0625rem] font-[480]">{figure ?? (standsOnGround(card) ? 'none' : '–')}</span>
        {figure !== null && <span className="ml-1 text-note">{unitText(card.control.unit)}</span>}
      </p>
      <p className="hidden text-note text-ink-2 tablet:block">
        {card.control.meaning}
        {onset?.direction === -1 && ', falling'} <ModelSymbol name={card.control.symbol} />
      </p>
    </>
  )
}

function Frequency({ card }: { card: Card }) {
  const onset = card.main === null ? undefined : card.onsets[card.main]
  if (!onset) return <span aria-hidden>–</span>
  const { figure, unit } = frequencyText(onset.omega, card.timeUnit)
  return (
    <p>
      <span className="sr-only">Frequency </span>
      <span className="figures text-note font-[480]">{figure}</span> <span className="text-note">{unit}</span>
    </p>
  )
}
