import type { ShownLine } from '#shared/api/revisions.ts'
import type { FormattedSource } from '#shared/api/sources.ts'
import type { ModelDocument } from '#shared/model/document.ts'
import { ModelSymbol } from '#src/components/symbol.tsx'
import { Cell, Row, Table, TableHead } from '#src/components/table.tsx'
import { exactFigure } from '#src/lib/figures.ts'
import { unitText } from '#src/lib/onset-figures.ts'
import { EquationLines } from './equation-lines.tsx'

/** Which sources a line or a parameter cites, as numbers in the page's list of sources. */
export function citedBy(sources: readonly FormattedSource[]) {
  const lines = new Map<number, { href: string; label: string }[]>()
  const symbols = new Map<string, { href: string; label: string }[]>()
  sources.forEach((source, index) => {
    const entry = { href: `#source-${index + 1}`, label: String(index + 1) }
    for (const { target } of source.links) {
      if (target.kind === 'line') lines.set(target.line, [...(lines.get(target.line) ?? []), entry])
      if (target.kind === 'parameter') symbols.set(target.symbol, [...(symbols.get(target.symbol) ?? []), entry])
    }
  })
  return { lines, symbols }
}

/** Equations typeset, parameters and states as tables: a frozen model to read. */
export function ModelSheet({
  document,
  lines,
  sources,
}: {
  document: ModelDocument
  lines: readonly ShownLine[]
  sources: readonly FormattedSource[]
}) {
  const cited = citedBy(sources)
  return (
    <div className="grid grid-cols-1 content-start gap-4 bench:grid-cols-2">
      <section aria-labelledby="sheet-equations" className="sheet min-w-0 p-5">
        <h2 id="sheet-equations" className="mb-3 text-subtitle">
          Equations
        </h2>
        <EquationLines lines={lines} cited={cited.lines} />
        {document.leftOut && document.leftOut.length > 0 && (
          <>
            <h3 className="mt-5 font-[640]">Left out</h3>
            <ul className="list-disc pl-5">
              {document.leftOut.map((item) => (
                <li key={item}>{item}</li>
              ))}
            </ul>
          </>
        )}
        {document.notes && (
          <>
            <h3 className="mt-5 font-[640]">Notes</h3>
            <p className="whitespace-pre-wrap">{document.notes}</p>
          </>
        )}
      </section>
      <div className="grid min-w-0 grid-cols-1 content-start gap-4">
        <section aria-labelledby="sheet-parameters" className="sheet min-w-0 pt-4">
          <h2 id="sheet-parameters" className="px-4 text-subtitle">
            Parameters
          </h2>
          <Table caption="Parameters">
            <TableHead
              columns={[
                'Symbol',
                'Meaning',
                { label: 'Value', className: 'text-right' },
                'Unit',
                'Low to high',
                'Sources',
              ]}
            />
            <tbody>
              {document.parameters.map((row) => (
                <Row key={row.symbol} className={row.symbol === document.control ? 'bg-pencil-tint' : ''}>
                  <Cell>
                    <ModelSymbol name={row.symbol} />
                  </Cell>
                  <Cell>
                    {row.meaning}
                    {row.symbol === document.control && (
                      <span className="block text-label text-ink-2">control parameter</span>
                    )}
                  </Cell>
                  <Cell className="figures text-right text-note">{exactFigure(row.value)}</Cell>
                  <Cell className="text-note">{unitText(row.unit ?? '')}</Cell>
                  <Cell className="figures text-note whitespace-nowrap">
                    {row.low === undefined ? '' : `${exactFigure(row.low)} to ${exactFigure(row.high)}`}
                  </Cell>
                  <Cell className="text-note">
                    {(cited.symbols.get(row.symbol) ?? []).map((source) => (
                      <a
                        key={source.href}
                        href={source.href}
                        className="link inline-grid min-h-6 min-w-6 place-items-center"
                        aria-label={`Source ${source.label} of ${row.symbol}`}
                      >
                        {source.label}
                      </a>
                    ))}
                  </Cell>
                </Row>
              ))}
            </tbody>
          </Table>
        </section>
        <section aria-labelledby="sheet-states" className="sheet min-w-0 pt-4">
          <h2 id="sheet-states" className="px-4 text-subtitle">
            States
          </h2>
          <Table caption="States and the box that steady states are looked for in">
            <TableHead columns={['Symbol', 'Meaning', 'Searched from', 'to', 'Starts at', 'Unit']} />
            <tbody>
              {document.states.map((row) => (
                <Row key={row.symbol}>
                  <Cell>
                    <ModelSymbol name={row.symbol} />
                  </Cell>
                  <Cell>{row.meaning}</Cell>
                  <Cell className="figures text-note">{exactFigure(row.low)}</Cell>
                  <Cell className="figures text-note">{exactFigure(row.high)}</Cell>
                  <Cell className="figures text-note">
                    {row.start === undefined ? 'middle' : exactFigure(row.start)}
                  </Cell>
                  <Cell className="text-note">{unitText(row.unit ?? '')}</Cell>
                </Row>
              ))}
            </tbody>
          </Table>
        </section>
      </div>
    </div>
  )
}
