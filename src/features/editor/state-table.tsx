import { Plus, X } from 'lucide-react'
import type * as Y from 'yjs'
import type { DraftContent } from '#shared/model/draft.ts'
import type { StateCell } from '#shared/ydoc/shape.ts'
import { Button } from '#src/components/button.tsx'
import { classes } from '#src/lib/class-names.ts'
import { CellInput } from './cell-input.tsx'
import { addState, removeState, setStateCell } from './draft-tables.ts'

export interface StateTableProps {
  doc: Y.Doc
  content: DraftContent
  readOnly: boolean
  /** Faults by path of the model document: "states[0].low". */
  faults: ReadonlyMap<string, string>
}

const columns: { cell: StateCell; label: string; figures: boolean; className: string }[] = [
  { cell: 'symbol', label: 'Symbol', figures: true, className: 'w-[17%]' },
  { cell: 'low', label: 'From', figures: true, className: 'w-[18%]' },
  { cell: 'high', label: 'To', figures: true, className: 'w-[18%]' },
  { cell: 'start', label: 'Start', figures: true, className: 'w-[19%]' },
  { cell: 'unit', label: 'Unit', figures: false, className: 'w-[17%]' },
]

/** The state table: the box that steady states are looked for in, and the values the model starts from. */
export function StateTable({ doc, content, readOnly, faults }: StateTableProps) {
  return (
    <div>
      <table className="w-full table-fixed border-collapse">
        <caption className="sr-only">States of the model and the box that steady states are looked for in</caption>
        <thead>
          <tr>
            {columns.map((column) => (
              <th
                key={column.cell}
                scope="col"
                className={classes('px-1.5 py-1 text-left text-label font-[400] text-ink-3', column.className)}
              >
                {column.label}
              </th>
            ))}
            <th className="w-9">
              <span className="sr-only">Remove</span>
            </th>
          </tr>
        </thead>
        {content.states.map((row, index) => {
          const name = row.symbol || `state ${index + 1}`
          const rowFaults = columns.flatMap(({ cell }) => faults.get(`states[${index}].${cell}`) ?? [])
          const wholeRow = faults.get(`states[${index}]`)
          return (
            <tbody key={row.id} className="border-b border-rule">
              <tr>
                {columns.map(({ cell, label, figures }) => (
                  <td key={cell} className="p-0.5">
                    <CellInput
                      label={`${label} of ${name}`}
                      value={row[cell]}
                      readOnly={readOnly}
                      figures={figures}
                      fault={faults.get(`states[${index}].${cell}`)}
                      placeholder={cell === 'start' && !readOnly ? 'middle' : undefined}
                      onChange={(value) => setStateCell(doc, row.id, cell, value)}
                    />
                  </td>
                ))}
                <td className="text-right">
                  {!readOnly && (
                    <button
                      type="button"
                      aria-label={`Remove ${name}`}
                      onClick={() => removeState(doc, row.id)}
                      className="inline-grid size-7 place-items-center rounded-control text-ink-3 hover:bg-well hover:text-ink max-bench:size-11"
                    >
                      <X aria-hidden className="size-3.5" />
                    </button>
                  )}
                </td>
              </tr>
              <tr>
                <td colSpan={columns.length + 1} className="px-0.5 pb-1">
                  <CellInput
                    label={`Meaning of ${name}`}
                    value={row.meaning}
                    readOnly={readOnly}
                    placeholder={readOnly ? '' : 'meaning'}
                    onChange={(value) => setStateCell(doc, row.id, 'meaning', value)}
                  />
                  {[...rowFaults, ...(wholeRow ? [wholeRow] : [])].map((fault) => (
                    <p key={fault} className="px-1.5 text-note font-[620] text-fault">
                      {fault}
                    </p>
                  ))}
                </td>
              </tr>
            </tbody>
          )
        })}
      </table>
      {!readOnly && (
        <Button
          look="quiet"
          className="mt-1"
          icon={<Plus aria-hidden className="size-4" />}
          onClick={() => addState(doc)}
        >
          Add a state
        </Button>
      )}
    </div>
  )
}
