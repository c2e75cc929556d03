import { type ComponentProps, type ReactNode, useRef } from 'react'
import { useOverflows } from '#src/hooks/use-overflows.ts'
import { classes } from '#src/lib/class-names.ts'

/** A ruled table: heavy line under the head, hairlines between rows. Scrolls sideways inside itself where it must. */
export function Table({
  caption,
  captionHidden = true,
  children,
  className,
}: {
  caption: string
  captionHidden?: boolean
  children: ReactNode
  className?: string
}) {
  const box = useRef<HTMLDivElement>(null)
  // A box that scrolls has to be reachable by keyboard; one that does not is no stop on the way.
  const scrolls = useOverflows(box)
  const reachable = scrolls ? { role: 'region', 'aria-label': caption, tabIndex: 0 } : {}
  return (
    <div ref={box} {...reachable} className={classes('overflow-x-auto', className)}>
      <table className="w-full border-collapse text-left">
        <caption className={captionHidden ? 'sr-only' : 'px-4 py-2 text-left text-note text-ink-2'}>{caption}</caption>
        {children}
      </table>
    </div>
  )
}

export function TableHead({
  columns,
}: {
  columns: readonly (string | { label: string; className?: string; hidden?: boolean })[]
}) {
  return (
    <thead>
      <tr className="border-b-[1.5px] border-ink">
        {columns.map((column) => {
          const { label, className, hidden } = typeof column === 'string' ? { label: column } : column
          return (
            <th
              key={label}
              scope="col"
              className={classes('px-2.5 py-2.5 tablet:px-4 text-label font-[400] text-ink-2', className)}
            >
              {hidden ? <span className="sr-only">{label}</span> : label}
            </th>
          )
        })}
      </tr>
    </thead>
  )
}

export function Cell({ className, ...rest }: ComponentProps<'td'>) {
  return <td {...rest} className={classes('px-2.5 py-2 align-middle tablet:px-4', className)} />
}

export function Row({ className, ...rest }: ComponentProps<'tr'>) {
  return <tr {...rest} className={classes('border-b border-rule last:border-b-0', className)} />
}
