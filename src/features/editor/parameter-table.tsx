import { Plus, X } from 'lucide-react'
import type * as Y from 'yjs'
import type { DraftContent } from '#shared/model/draft.ts'
import type { ParameterCell } from '#shared/ydoc/shape.ts'
import { Button } from '#src/components/button.tsx'
import { ChangeTriangle } from '#src/components/revision-triangle.tsx'
import { classes } from '#src/lib/class-names.ts'
import { CellInput } from './cell-input.tsx'
import { addParameter, removeParameter, setParameterCell } from './draft-tables.ts'

export interface ParameterTableProps {
  doc: Y.Doc
  content: DraftContent
  readOnly: boolean
  /** Faults by path of the model document: "parameters[0].value". */
  faults: ReadonlyMap<string, string>
  /** Symbols whose row differs from the revision in force, with that revision's mark. */
  changed: { symbols: ReadonlySet<string>; mark: string } | null
}

const columns: { cell: ParameterCell; label: string; figures: boolean; className: string }[] = [
  { cell: 'symbol', label: 'Symbol', figures: true, className: 'w-[17%]' },
  { cell: 'value', label: 'Value', figures: true, className: 'w-[19%]' },
  { cell: 'unit', label: 'Unit', figures: false, className: 'w-[17%]' },
  { cell: 'low', label: 'Low', figures: true, className: 'w-[18%]' },
  { cell: 'high', label: 'High', figures: true, className: 'w-[18%]' },
]

/** The parameter table of the draft, cell by cell in the shared document. The control parameter's row is lit. */
export function ParameterTable({ doc, content, readOnly, faults, changed }: ParameterTableProps) {
  const control = content.settings.control
  return (
    <div>
      <table className="w-full table-fixed border-collapse">
        <caption className="sr-only">Parameters of the model</caption>
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
        {content.parameters.map((row, index) => {
          const name = row.symbol || `parameter ${index + 1}`
          const isControl = row.symbol !== '' && row.symbol === control
          const rowFaults = columns.flatMap(({ cell }) => faults.get(`parameters[${index}].${cell}`) ?? [])
          const wholeRow = faults.get(`parameters[${index}]`)
          return (
            <tbody key={row.id} className={classes('border-b border-rule', isControl && 'bg-pencil-tint')}>
              <tr className="relative">
                {columns.map(({ cell, label, figures }) => (
                  <td key={cell} className="relative p-0.5">
                    {cell === 'symbol' && changed?.symbols.has(row.symbol) && (
                      <span className="absolute top-1/2 -left-4 -translate-y-1/2 max-bench:hidden">
                        <ChangeTriangle mark={changed.mark} label={`${name} changed since revision ${changed.mark}`} />
                      </span>
                    )}
                    <CellInput
                      label={`${label} of ${name}`}
                      value={row[cell] ?? ''}
                      readOnly={readOnly}
                      figures={figures}
                      align={cell === 'value' ? 'right' : 'left'}
                      fault={faults.get(`parameters[${index}].${cell}`)}
                      onChange={(value) => setParameterCell(doc, row.id, cell, value)}
                    />
                  </td>
                ))}
                <td className="text-right">
                  {!readOnly && (
                    <button
                      type="button"
                      aria-label={`Remove ${name}`}
                      onClick={() => removeParameter(doc, row.id)}
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
                    onChange={(value) => setParameterCell(doc, row.id, 'meaning', value)}
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
      {content.parameters.length === 0 && (
        <p className="px-1.5 py-2 text-note text-ink-2">No parameter yet. The control parameter is one of them.</p>
      )}
      {!readOnly && (
        <Button
          look="quiet"
          className="mt-1"
          icon={<Plus aria-hidden className="size-4" />}
          onClick={() => addParameter(doc)}
        >
          Add a parameter
        </Button>
      )}
    </div>
  )
}
