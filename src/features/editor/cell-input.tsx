import { useEffect, useRef, useState } from 'react'
import { classes } from '#src/lib/class-names.ts'

export interface CellInputProps {
  /** Read out with the cell: "value of mu". */
  label: string
  value: string
  onChange: (value: string) => void
  readOnly: boolean
  /** The fault of this cell, in words; told by an icon and underline as well as in the list below the table. */
  fault?: string
  figures?: boolean
  align?: 'left' | 'right'
  placeholder?: string
}

/**
 * One cell of a co-edited table. Every keystroke goes into the shared document (a half-typed "1e" is kept); Escape puts
 * back what stood there when the cell was entered. While nobody types here, it shows what others write.
 */
export function CellInput({
  label,
  value,
  onChange,
  readOnly,
  fault,
  figures = false,
  align = 'left',
  placeholder,
}: CellInputProps) {
  const entered = useRef(value)
  const [typed, setTyped] = useState<string | null>(null)
  // Somebody else's change of the same cell wins over an unchanged field, never over what is being typed here.
  useEffect(() => {
    setTyped((current) => (current === value ? null : current))
  }, [value])

  return (
    <input
      aria-label={label}
      aria-invalid={fault ? true : undefined}
      title={fault ?? undefined}
      value={typed ?? value}
      readOnly={readOnly}
      placeholder={placeholder}
      spellCheck={false}
      autoComplete="off"
      onFocus={() => {
        entered.current = value
      }}
      onChange={(event) => {
        setTyped(event.target.value)
        onChange(event.target.value)
      }}
      onBlur={() => setTyped(null)}
      onKeyDown={(event) => {
        if (event.key === 'Escape') {
          setTyped(null)
          onChange(entered.current)
        }
      }}
      className={classes(
        'min-h-7 w-full min-w-0 rounded-control border bg-transparent px-1.5 text-note max-bench:min-h-11 max-tablet:px-0.5',
        fault ? 'border-fault decoration-fault underline decoration-wavy' : 'border-transparent',
        readOnly ? 'text-ink-2' : 'hover:border-line focus:border-line focus:bg-well',
        figures && 'figures',
        align === 'right' && 'text-right',
      )}
    />
  )
}
