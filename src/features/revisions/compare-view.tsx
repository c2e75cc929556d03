import type { ModelDocument } from '#shared/model/document.ts'
import type { CardComparison, CardDifference } from '#shared/stability/compare.ts'
import { OnsetGlyph } from '#src/components/onset-glyph.tsx'
import { RevisionCloud } from '#src/components/revision-cloud.tsx'
import { ModelSymbol } from '#src/components/symbol.tsx'
import { Cell, Row, Table, TableHead } from '#src/components/table.tsx'
import { shortFigure } from '#src/lib/figures.ts'
import { compareLines, compareRows, parameterText, type RowChange, stateText } from './document-parts.ts'

const kindWords = { hard: 'hard', soft: 'soft', undecided: 'undecided', none: 'no onset' } as const
const kindHue = { hard: 'text-hard', soft: 'text-soft', undecided: 'text-open', none: 'text-ink' } as const

/** The consequence first: does the verdict change? `verb` is "Approving this" in a review, "This revision" in a comparison. */
export function ConsequenceHead({
  comparison,
  verb,
  level = 2,
}: {
  comparison: CardComparison | null
  verb: string
  level?: 1 | 2
}) {
  const Heading = level === 1 ? 'h1' : 'h2'
  if (!comparison) {
    return <Heading className="text-consequence">{verb} puts the first revision in force</Heading>
  }
  if (!comparison.kind) {
    return <Heading className="text-consequence">{verb} leaves the verdict as it is</Heading>
  }
  const { was, now } = comparison.kind
  return (
    <div className="flex flex-wrap items-center gap-4">
      <span className="flex items-center gap-3" aria-hidden>
        <OnsetGlyph kind={was} size={44} />
        <span className="text-title">→</span>
        <OnsetGlyph kind={now} size={44} />
      </span>
      <Heading className="text-consequence">
        {verb} turns the verdict from <span className={kindHue[was]}>{kindWords[was]}</span> to{' '}
        <span className={kindHue[now]}>{kindWords[now]}</span>
      </Heading>
    </div>
  )
}

/** The equation block with changed places in a revision cloud, was above now; unchanged lines stay readable. */
export function ComparedEquations({ before, after }: { before: ModelDocument | null; after: ModelDocument }) {
  const changes = compareLines(before?.equations ?? after.equations, after.equations)
  const count = changes.reduce(
    (sum, change) => sum + (change.kind === 'changed' ? Math.max(change.was.length, change.now.length) : 0),
    0,
  )
  return (
    <section aria-labelledby="compared-equations" className="sheet min-w-0 p-4">
      <header className="flex items-baseline justify-between gap-3">
        <h2 id="compared-equations" className="text-subtitle">
          Equations
        </h2>
        <span className="text-note text-ink-2">
          {before === null
            ? 'first revision'
            : count === 0
              ? 'unchanged'
              : count === 1
                ? '1 line changed'
                : `${count} lines changed`}
        </span>
      </header>
      <div
        role="group"
        aria-label="Equation block"
        tabIndex={0}
        className="mt-3 grid gap-1 overflow-x-auto bg-well p-3"
      >
        {changes.map((change) =>
          change.kind === 'same' ? (
            <pre key={`same-${change.at}`} className="figures text-equation">
              {change.lines.join('\n')}
            </pre>
          ) : (
            <RevisionCloud key={`changed-${change.at}`} label={`Changed at line ${change.at}`}>
              <div className="grid grid-cols-[3rem_1fr] gap-x-2 gap-y-1">
                {change.was.length > 0 && (
                  <>
                    <span className="text-label leading-7 text-ink-2">was</span>
                    <pre className="figures text-equation text-ink-2">{change.was.join('\n')}</pre>
                  </>
                )}
                <span className="text-label leading-7 font-[640]">{change.now.length > 0 ? 'now' : 'gone'}</span>
                {change.now.length > 0 && (
                  <pre className="figures bg-pencil-tint text-equation">{change.now.join('\n')}</pre>
                )}
              </div>
            </RevisionCloud>
          ),
        )}
      </div>
    </section>
  )
}

function ChangedRows({ title, rows }: { title: string; rows: RowChange[] }) {
  if (rows.length === 0) return null
  return (
    <Table caption={title} captionHidden={false}>
      <TableHead columns={['Symbol', 'Was', 'Now']} />
      <tbody>
        {rows.map((row) => (
          <Row key={row.symbol}>
            <Cell>
              <ModelSymbol name={row.symbol} /> <span className="text-note text-ink-2">{row.meaning}</span>
            </Cell>
            <Cell className="figures text-note">{row.was ?? 'not there'}</Cell>
            <Cell className="figures bg-pencil-tint text-note font-[620]">{row.now ?? 'gone'}</Cell>
          </Row>
        ))}
      </tbody>
    </Table>
  )
}

const settingNames: [keyof ModelDocument, string][] = [
  ['title', 'Title'],
  ['summary', 'Summary'],
  ['field', 'Field'],
  ['timeUnit', 'Time unit'],
  ['control', 'Control parameter'],
  ['secondControl', 'Second control'],
  ['observed', 'Observed quantity'],
  ['quietWord', 'Words for steady running'],
  ['notes', 'Notes'],
]

/** Parameters, states and settings that differ. */
export function ComparedTables({ before, after }: { before: ModelDocument | null; after: ModelDocument }) {
  const parameters = compareRows(before?.parameters ?? [], after.parameters, parameterText)
  const states = compareRows(before?.states ?? [], after.states, stateText)
  const settings =
    before === null
      ? []
      : settingNames.flatMap(([key, name]): RowChange[] =>
          before[key] === after[key]
            ? []
            : [{ symbol: name, meaning: '', was: String(before[key] ?? ''), now: String(after[key] ?? '') }],
        )
  return (
    <section aria-labelledby="compared-tables" className="sheet min-w-0 p-4">
      <h2 id="compared-tables" className="text-subtitle">
        Parameters and settings
      </h2>
      {parameters.length + states.length + settings.length === 0 && (
        <p className="mt-2 text-note text-ink-2">Unchanged.</p>
      )}
      <ChangedRows title="Parameters" rows={parameters} />
      <ChangedRows title="States" rows={states} />
      {settings.length > 0 && (
        <Table caption="Settings" captionHidden={false}>
          <TableHead columns={['Setting', 'Was', 'Now']} />
          <tbody>
            {settings.map((row) => (
              <Row key={row.symbol}>
                <Cell>{row.symbol}</Cell>
                <Cell className="text-note">{row.was || 'nothing'}</Cell>
                <Cell className="bg-pencil-tint text-note font-[620]">{row.now || 'nothing'}</Cell>
              </Row>
            ))}
          </tbody>
        </Table>
      )}
    </section>
  )
}

const shown = (value: CardDifference['was'], unit: string | undefined) =>
  value === null
    ? 'not there'
    : typeof value === 'number'
      ? `${shortFigure(value)}${unit && unit !== '1' ? ` ${unit}` : ''}`
      : value

/** What the analysis says on both sides, difference by difference; what changes the verdict is bold. */
export function ComparedVerdicts({ comparison, was, now }: { comparison: CardComparison; was: string; now: string }) {
  return (
    <Table caption="Differences of the stability cards" captionHidden>
      <TableHead columns={['', { label: `Revision ${was}` }, { label: `Revision ${now}` }]} />
      <tbody>
        {comparison.differences.length === 0 && (
          <Row>
            <Cell>Every figure of the card</Cell>
            <Cell>as it was</Cell>
            <Cell>unchanged</Cell>
          </Row>
        )}
        {comparison.differences.map((difference) => (
          <Row key={difference.what}>
            <Cell className={difference.change === 'major' ? 'font-[640]' : ''}>{difference.what}</Cell>
            <Cell className="figures text-note">{shown(difference.was, difference.unit)}</Cell>
            <Cell className={`figures bg-pencil-tint text-note ${difference.change === 'major' ? 'font-[680]' : ''}`}>
              {shown(difference.now, difference.unit)}
            </Cell>
          </Row>
        ))}
      </tbody>
    </Table>
  )
}
