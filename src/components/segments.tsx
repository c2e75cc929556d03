import { useId } from 'react'
import { classes } from '#src/lib/class-names.ts'

export interface SegmentsProps<Value extends string> {
  label: string
  labelHidden?: boolean
  options: readonly { value: Value; label: string }[]
  value: Value
  onChange: (value: Value) => void
}

/** One of a few, all in sight: radio buttons side by side, arrows move between them. */
export function Segments<Value extends string>({
  label,
  labelHidden = true,
  options,
  value,
  onChange,
}: SegmentsProps<Value>) {
  const name = useId()
  return (
    <fieldset className="inline-block min-w-0">
      <legend className={labelHidden ? 'sr-only' : 'mb-1 text-label text-ink-2'}>{label}</legend>
      <div className="inline-flex max-w-full flex-wrap rounded-control border-[1.5px] border-ink">
        {options.map((option, index) => (
          <label
            key={option.value}
            className={classes(
              'relative inline-flex min-h-11 items-center px-3.5 font-[560] bench:min-h-7 bench:text-note',
              index > 0 && 'border-l border-ink',
              'has-checked:bg-ink has-checked:font-[620] has-checked:text-sheet',
              'has-focus-visible:z-10 has-focus-visible:outline-2 has-focus-visible:outline-offset-2 has-focus-visible:outline-ink has-focus-visible:shadow-[0_0_0_6px_var(--color-pencil)]',
            )}
          >
            <input
              type="radio"
              name={name}
              value={option.value}
              checked={option.value === value}
              onChange={() => onChange(option.value)}
              className="absolute inset-0 size-full cursor-pointer appearance-none opacity-0"
            />
            {option.label}
          </label>
        ))}
      </div>
    </fieldset>
  )
}
