import type { ReactNode } from 'react'

export interface StateSheetProps {
  /** The strip, triangle or icon above the headline. */
  picture?: ReactNode
  title: string
  children: ReactNode
  acts?: ReactNode
  /** Errors are announced at once; the rest politely. */
  urgent?: boolean
  /** 1 where the sheet is the whole page. */
  level?: 1 | 2
}

/** An empty, waiting, refused or failed state: what happened, what still holds, what to do first. */
export function StateSheet({ picture, title, children, acts, urgent = false, level = 2 }: StateSheetProps) {
  const Heading = level === 1 ? 'h1' : 'h2'
  return (
    <section role={urgent ? 'alert' : undefined} className="sheet grid max-w-xl content-start gap-3 p-6">
      {picture && <div className="flex min-h-10 items-center gap-3">{picture}</div>}
      <Heading className="text-subtitle">{title}</Heading>
      <div className="max-w-[56ch] text-ink-2">{children}</div>
      {acts && <div className="mt-2 flex flex-wrap items-center gap-2">{acts}</div>}
    </section>
  )
}
