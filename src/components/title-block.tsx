import type { ReactNode } from 'react'
import { classes } from '#src/lib/class-names.ts'

export interface TitleCell {
  label: string
  value: ReactNode
  /** When the cell goes as the window narrows: 'first' below bench, 'second' below tablet, 'never'. */
  drops?: 'first' | 'second' | 'never'
}

const dropping = { first: 'hidden bench:block', second: 'hidden tablet:block', never: '' } as const

/** The identity of a page or group, as the title block of a drawing. The title is the page's heading. */
export function TitleBlock({
  title,
  note,
  cells,
}: {
  title: ReactNode
  note?: ReactNode
  cells: readonly TitleCell[]
}) {
  return (
    <header className="flex flex-wrap rounded-sheet border-[1.5px] border-ink bg-sheet tablet:flex-nowrap">
      <div className="min-w-0 flex-1 basis-full px-3.5 py-2 tablet:basis-auto">
        <h1 className="text-title wrap-anywhere">{title}</h1>
        {note && <p className="text-note text-ink-2">{note}</p>}
      </div>
      <dl className="flex min-w-0 basis-full max-tablet:border-t max-tablet:border-rule tablet:max-w-[76%] tablet:shrink-0 tablet:basis-auto">
        {cells.map((cell) => (
          <div
            key={cell.label}
            className={classes(
              'min-w-0 px-3.5 py-2 tablet:border-l tablet:border-rule max-tablet:not-first:border-l max-tablet:not-first:border-rule',
              dropping[cell.drops ?? 'never'],
            )}
          >
            <dt className="text-label whitespace-nowrap text-ink-3">{cell.label}</dt>
            <dd className="mt-1 font-[560] bench:whitespace-nowrap">{cell.value}</dd>
          </div>
        ))}
      </dl>
    </header>
  )
}
