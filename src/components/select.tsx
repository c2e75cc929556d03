import { ChevronDown } from 'lucide-react'
import type { ComponentProps, ReactNode } from 'react'
import { classes } from '#src/lib/class-names.ts'
import { Labelled } from './field.tsx'

export interface SelectProps extends Omit<ComponentProps<'select'>, 'children'> {
  label: string
  labelHidden?: boolean
  hint?: ReactNode
  error?: string | null
  options: readonly { value: string; label: string }[]
}

/** The browser's own list of choices, so that phones, keyboards and screen readers work as everywhere. */
export function Select({ label, labelHidden, hint, error, options, className, ...rest }: SelectProps) {
  return (
    <Labelled
      label={label}
      labelHidden={labelHidden}
      hint={hint}
      error={error}
      className={className}
      render={(wiring) => (
        <span className="relative block">
          <select
            {...rest}
            {...wiring}
            className={classes(
              'w-full min-h-11 appearance-none rounded-control border bg-sheet py-0 pr-8 pl-2.5 text-body bench:min-h-8 disabled:text-ink-3',
              error ? 'border-fault' : 'border-line',
            )}
          >
            {options.map((option) => (
              <option key={option.value} value={option.value} className="bg-sheet text-ink">
                {option.label}
              </option>
            ))}
          </select>
          <ChevronDown aria-hidden className="pointer-events-none absolute top-1/2 right-2 size-4 -translate-y-1/2" />
        </span>
      )}
    />
  )
}
