import { Plus, X } from 'lucide-react'
import type { ReactNode } from 'react'
import { Button } from '#src/components/button.tsx'
import { classes } from '#src/lib/class-names.ts'
import { CellInput } from './cell-input.tsx'

export interface DraftColumn<Cell extends string> {
  cell: Cell
  label: string
  /** Numbers and symbols stand in figures, words do not. */
  figures: boolean
  className: string
  align?: 'left' | 'right'
  placeholder?: string
}

type Row<Cell extends string> = { id: string; symbol: string } & Readonly<Partial<Record<Cell, string>>>

export interface DraftTableProps<Cell extends string> {
  caption: string
  /** The table's name in the model document, which paths of faults begin with. */
  table: 'parameters' | 'states'
  noun: 'parameter' | 'state'
  rows: readonly Row<Cell>[]
  columns: readonly DraftColumn<Cell>[]
  /** Cells of the second line of a row, without a head of their own. */
  below: readonly DraftColumn<Cell>[]
  readOnly: boolean
  /** Faults by path of the model document: "parameters[0].value". */
  faults: ReadonlyMap<string, string>
  onCell: (id: string, cell: Cell, value: string) => void
  onRemove: (id: string) => void
  onAdd: () => void
  lit?: (row: Row<Cell>) => boolean
  /** What stands in the margin of a row. */
  margin?: (row: Row<Cell>, name: string) => ReactNode
  empty?: string
  /** How cells are filled in, where that is not plain. */
  note?: string
}

/** A co-edited table: two lines a row, each cell in the shared document, the row's faults under it. */
export function DraftTable<Cell extends string>(props: DraftTableProps<Cell>) {
  const { caption, table, noun, rows, columns, readOnly, onAdd, empty, note } = props
  return (
    <div data-place={table}>
      <table className="w-full table-fixed border-collapse">
        <caption className="sr-only">{caption}</caption>
        <thead>
          <tr>
            {columns.map(({ cell, label, className, align = 'left' }) => (
              <th
                key={cell}
                scope="col"
                className={classes(
                  'px-1.5 py-1 text-label font-[400] text-ink-3 max-tablet:px-1',
                  align === 'right' ? 'text-right' : 'text-left',
                  className,
                )}
              >
                {label}
              </th>
            ))}
            {/* On a phone the cells need the room: there it stands in the second line. */}
            <th className="w-9 max-bench:w-11 max-tablet:hidden">
              <span className="sr-only">Remove</span>
            </th>
          </tr>
        </thead>
        {rows.map((row, index) => (
          <DraftRow key={row.id} {...props} row={row} index={index} />
        ))}
      </table>
      {rows.length === 0 && empty && <p className="px-1.5 py-2 text-note text-ink-2">{empty}</p>}
      {!readOnly && note && rows.length > 0 && <p className="px-1.5 pt-2 text-note text-ink-2">{note}</p>}
      {!readOnly && (
        <Button look="quiet" className="mt-1" icon={<Plus aria-hidden className="size-4" />} onClick={onAdd}>
          Add a {noun}
        </Button>
      )}
    </div>
  )
}

function DraftRow<Cell extends string>(props: DraftTableProps<Cell> & { row: Row<Cell>; index: number }) {
  const { table, noun, row, index, columns, below, readOnly, faults, onCell, onRemove, lit, margin } = props
  const path = `${table}[${index}]`
  const name = row.symbol || `${noun} ${index + 1}`
  const cellOf = ({ cell, label, figures, align, placeholder }: DraftColumn<Cell>) => (
    <CellInput
      label={`${label} of ${name}`}
      value={row[cell] ?? ''}
      readOnly={readOnly}
      figures={figures}
      align={align}
      placeholder={readOnly ? undefined : placeholder}
      fault={faultAt(faults, `${path}.${cell}`)}
      onChange={(value) => onCell(row.id, cell, value)}
    />
  )
  const remove = !readOnly && (
    <button
      type="button"
      aria-label={`Remove ${name}`}
      onClick={() => onRemove(row.id)}
      className="inline-grid size-7 place-items-center rounded-control text-ink-3 hover:bg-well hover:text-ink max-bench:size-11"
    >
      <X aria-hidden className="size-3.5" />
    </button>
  )
  return (
    <tbody className={classes('border-b border-rule', lit?.(row) && 'bg-pencil-tint')}>
      <tr>
        {columns.map((column, at) => (
          <td key={column.cell} className="relative p-0.5">
            {at === 0 && margin?.(row, name)}
            {cellOf(column)}
          </td>
        ))}
        <td className="text-right max-tablet:hidden">{remove}</td>
      </tr>
      <tr>
        <td colSpan={columns.length + 1} className="px-0.5 pb-1">
          <div className="flex gap-1">
            {below.map((column) => (
              <div key={column.cell} className={column.className}>
                {cellOf(column)}
              </div>
            ))}
            <span className="shrink-0 tablet:hidden">{remove}</span>
          </div>
          {faultsOfRow(faults, path).map((fault) => (
            <p key={fault} className="px-1.5 text-note font-[620] text-fault">
              {fault}
            </p>
          ))}
        </td>
      </tr>
    </tbody>
  )
}

/** The fault of a cell, or of a part of it ("parameters[0].uncertainty.low"). */
function faultAt(faults: ReadonlyMap<string, string>, path: string): string | undefined {
  return faults.get(path) ?? [...faults].find(([at]) => at.startsWith(`${path}.`))?.[1]
}

/** All faults that speak of the row: none is without a place, whatever part of the row it names. */
function faultsOfRow(faults: ReadonlyMap<string, string>, path: string): string[] {
  const found = [...faults].filter(([at]) => at === path || at.startsWith(`${path}.`)).map(([, fault]) => fault)
  return [...new Set(found)]
}
