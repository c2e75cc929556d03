import { type KeyboardEvent, useRef } from 'react'
import { ModelSymbol } from '#src/components/symbol.tsx'
import { classes } from '#src/lib/class-names.ts'
import { EventShape, eventWords } from './drawing-marks.tsx'
import { FigureText } from './figure-text.tsx'
import { type CardEvent, roleWord } from './geometry/events.ts'
import { controlFigure } from './geometry/figures.ts'
import { distanceWords, nearestLimit } from './geometry/running.ts'
import type { Subject } from './geometry/subject.ts'

export interface PointListProps {
  events: readonly CardEvent[]
  subject: Subject
  at: number
  lit: string | null
  onLit: (id: string | null) => void
  headingId: string
}

const row =
  'grid w-full grid-cols-[24px_minmax(4.5rem,auto)_1fr_auto] items-baseline gap-x-3 border-b border-rule px-1 py-2 text-left'

function Running({ at, subject, events }: Pick<PointListProps, 'at' | 'subject' | 'events'>) {
  const limit = nearestLimit(at, events)
  return (
    <li className={classes(row, 'bg-pencil-tint')}>
      <svg width="24" height="18" viewBox="-12 -10 24 20" aria-hidden className="self-center">
        <path d="M0 -9L6 -3V9H-6V-3Z" fill="var(--color-ink)" />
      </svg>
      <span className="figures text-note">{controlFigure(at, subject)}</span>
      <span className="col-span-2 font-[620]">Running</span>
      <span className="col-span-2 col-start-3 text-label text-ink-2">
        {limit ? distanceWords(at, limit, subject) : 'no limit of the running state in the range'}
      </span>
    </li>
  )
}

/**
 * Everything along the control, lowest first: what it is, and whether it is a limit of the steady running. A row and its
 * mark on the drawing light up together; Up and Down go from row to row.
 */
export function PointList({ events, subject, at, lit, onLit, headingId }: PointListProps) {
  const list = useRef<HTMLUListElement>(null)
  const step = (key: KeyboardEvent) => {
    if (key.key !== 'ArrowDown' && key.key !== 'ArrowUp') return
    const rows: Element[] = [...(list.current?.querySelectorAll('button') ?? [])]
    const here = document.activeElement ? rows.indexOf(document.activeElement) : -1
    const next = rows[here + (key.key === 'ArrowDown' ? 1 : -1)]
    if (here < 0 || !(next instanceof HTMLElement)) return
    key.preventDefault()
    next.focus()
  }
  const below = events.filter((event) => event.p <= at)
  const above = events.filter((event) => event.p > at)
  const entry = (event: CardEvent) => (
    <li key={event.id}>
      <button
        type="button"
        aria-pressed={lit === event.id}
        aria-label={eventWords(event, subject.control.unit)}
        onClick={() => onLit(lit === event.id ? null : event.id)}
        className={classes(row, 'cursor-pointer hover:bg-well', lit === event.id && 'bg-pencil-tint')}
      >
        <svg width="24" height="18" viewBox="-12 -10 24 20" aria-hidden className="self-center">
          <EventShape event={event} />
        </svg>
        <span className="figures text-note">
          <FigureText text={event.text} />
        </span>
        <span className="font-[620]">{event.name}</span>
        <span className={classes('text-note', event.role === 'limit' ? 'font-[620]' : 'text-ink-2')}>
          {event.role === 'other' ? '' : roleWord(event)}
        </span>
        <span className="col-span-2 col-start-3 text-label text-ink-2">
          {event.role === 'other' ? `${event.detail}; ${roleWord(event)}` : event.detail}
        </span>
      </button>
    </li>
  )
  return (
    <section aria-labelledby={headingId}>
      <h3 id={headingId} className="border-b-[1.5px] border-ink pb-2 font-[640]">
        Along{' '}
        {subject.control.meaning ? `the ${subject.control.meaning}` : <ModelSymbol name={subject.control.symbol} />},
        lowest first
      </h3>
      <ul ref={list} onKeyDown={step}>
        {below.map(entry)}
        <Running at={at} subject={subject} events={events} />
        {above.map(entry)}
      </ul>
      {events.length === 0 && (
        <p className="py-2 text-note text-ink-2">No onset, turning point or branch point was found in the range.</p>
      )}
    </section>
  )
}
