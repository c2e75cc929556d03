import { useMemo, useState } from 'react'
import { Cell, Row, Table } from '#src/components/table.tsx'
import { classes } from '#src/lib/class-names.ts'
import { type BranchRow, branchRows, type SortKey, sortedRows } from './geometry/branch-rows.ts'
import { eigenTexts } from './geometry/eigen-text.ts'
import { copiedFigure, copiedObserved, copiedText, rateUnit } from './geometry/figures.ts'
import type { CardGeometry } from './geometry/scene.ts'
import { nameOf, type Quantity } from './geometry/subject.ts'

const titled = (quantity: Quantity) => `${nameOf(quantity)}${quantity.unit ? `, ${quantity.unit}` : ''}`

/** Digits of the table: one more than the drawing's, it is what people copy from. */
const copied = 6

function stableText(row: BranchRow): string {
  if (row.stable === null) return 'changes here'
  return row.stable ? 'yes' : 'no'
}

/** The table behind the drawing: the computed points of the branches, sortable by every column. */
export function BranchTable({ geometry, older }: { geometry: CardGeometry; older: boolean }) {
  const { subject, pieces, events } = geometry
  const [sort, setSort] = useState<{ key: SortKey; rising: boolean }>({ key: 'branch', rising: true })
  const rows = useMemo(
    () => sortedRows(branchRows(pieces, events), sort.key, sort.rising),
    [pieces, events, sort.key, sort.rising],
  )
  const columns: { key: Exclude<SortKey, 'branch'>; label: string }[] = [
    { key: 'p', label: titled(subject.control) },
    { key: 'value', label: `Steady state: ${titled(subject.observed)}` },
    { key: 'growth', label: `Largest growth rate, ${rateUnit(subject)}` },
    { key: 'stable', label: 'Stable' },
  ]
  if (rows.length === 0) return <p className="py-4 text-ink-2">No steady state was found in the range.</p>
  return (
    <Table
      caption={`Steady states along the ${nameOf(subject.control)}`}
      className={classes('max-h-[460px] overflow-y-auto', older && 'card-older-words')}
    >
      <thead className="sticky top-0 bg-sheet">
        <tr className="border-b-[1.5px] border-ink">
          {columns.map((column) => {
            const sorted = sort.key === column.key
            return (
              <th
                key={column.key}
                scope="col"
                aria-sort={sorted ? (sort.rising ? 'ascending' : 'descending') : 'none'}
                className="px-3 py-1 text-label font-[400] text-ink-2"
              >
                <button
                  type="button"
                  className={classes(
                    'inline-flex min-h-11 items-center gap-1 text-left bench:min-h-8',
                    sorted && 'font-[640] text-ink',
                  )}
                  onClick={() => setSort({ key: column.key, rising: sorted ? !sort.rising : true })}
                >
                  {column.label}
                  <span aria-hidden>{sorted ? (sort.rising ? '↑' : '↓') : ''}</span>
                </button>
              </th>
            )
          })}
        </tr>
      </thead>
      <tbody>
        {rows.map((row) => (
          <Row key={row.key} className={row.event ? 'bg-well' : undefined}>
            <Cell className="figures px-3 py-1 text-note">
              {row.event ? copiedText(row.event.text) : copiedFigure(row.p, copied)}
              {row.event && <span className="ml-2 font-sans font-[620]">{row.event.name}</span>}
            </Cell>
            <Cell className="figures px-3 py-1 text-note">{copiedObserved(row.value, subject, copied)}</Cell>
            <Cell className="figures px-3 py-1 text-note">
              {row.growth === null ? 'none' : copiedFigure(row.growth, 4)}
            </Cell>
            <Cell className="px-3 py-1">{stableText(row)}</Cell>
          </Row>
        ))}
      </tbody>
    </Table>
  )
}

/** The table behind the eigenvalue plane: all eigenvalues of one branch at the rows of the sweep. */
export function EigenTable({ geometry, branch }: { geometry: CardGeometry; branch: number }) {
  const { subject, pieces, events } = geometry
  const rows = useMemo(
    () => branchRows(pieces, events).filter((row) => row.branch === branch),
    [pieces, events, branch],
  )
  return (
    <Table caption={`Eigenvalues along the ${nameOf(subject.control)}`} className="max-h-[300px] overflow-y-auto">
      <thead className="sticky top-0 bg-sheet">
        <tr className="border-b-[1.5px] border-ink text-label text-ink-2">
          <th scope="col" className="px-2 py-1.5 font-[400]">
            {titled(subject.control)}
          </th>
          <th scope="col" className="px-2 py-1.5 font-[400]">
            Eigenvalues, {rateUnit(subject)}
          </th>
        </tr>
      </thead>
      <tbody>
        {rows.map((row) => (
          <Row key={row.key}>
            <Cell className="figures px-2 py-1 align-top text-note">
              {row.event ? copiedText(row.event.text) : copiedFigure(row.p, 4)}
            </Cell>
            <Cell className="figures px-2 py-1 text-note">
              {eigenTexts(row.eigenvalues).map(({ text }, i) => (
                // biome-ignore lint/suspicious/noArrayIndexKey: equal eigenvalues are told apart by nothing else
                <span key={`${text} ${i}`} className="mr-3 inline-block whitespace-nowrap">
                  {copiedText(text)}
                </span>
              ))}
            </Cell>
          </Row>
        ))}
      </tbody>
    </Table>
  )
}
