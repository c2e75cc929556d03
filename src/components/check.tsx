import { Check as CheckIcon } from 'lucide-react'
import type { ComponentProps, ReactNode } from 'react'
import { classes } from '#src/lib/class-names.ts'

export interface CheckProps extends Omit<ComponentProps<'input'>, 'type' | 'children'> {
  children: ReactNode
  /** Stands at the end of the row, for facets. */
  count?: number
  /** The words are read but not shown. */
  labelHidden?: boolean
}

/** A tick box with its words; the whole row is the target. */
export function Check({ children, count, labelHidden = false, className, ...rest }: CheckProps) {
  return (
    <label className={classes('flex min-h-11 items-center gap-2.5 bench:min-h-7', className)}>
      <span className="relative inline-grid size-4 shrink-0 place-items-center">
        <input
          type="checkbox"
          {...rest}
          className="peer size-4 appearance-none rounded-[2px] border-[1.5px] border-line bg-sheet checked:border-ink checked:bg-ink disabled:border-rule"
        />
        <CheckIcon
          aria-hidden
          strokeWidth={3}
          className="pointer-events-none absolute size-3 text-sheet opacity-0 peer-checked:opacity-100"
        />
      </span>
      <span className={labelHidden ? 'sr-only' : 'flex min-w-0 flex-1 items-center gap-2'}>{children}</span>
      {count !== undefined && <span className="figures text-tick text-ink-2">{count}</span>}
    </label>
  )
}
