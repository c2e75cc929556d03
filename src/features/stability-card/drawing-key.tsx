import type { ReactNode } from 'react'
import { OnsetMark } from '#src/components/onset-mark.tsx'
import type { CardGeometry } from './geometry/scene.ts'

function Entry({ picture, words }: { picture: ReactNode; words: string }) {
  return (
    <li className="inline-flex items-center gap-2 text-label text-ink-2">
      <svg width="28" height="16" viewBox="0 0 28 16" aria-hidden className="shrink-0">
        {picture}
      </svg>
      {words}
    </li>
  )
}

const line = (colour: string, width: number, dashed: boolean) => (
  <path d="M0 8H28" stroke={colour} strokeWidth={width} strokeDasharray={dashed ? '7 5' : undefined} />
)

/** What the lines and marks of this drawing mean; only what is on it. */
export function DrawingKey({ geometry, earlierLabel }: { geometry: CardGeometry; earlierLabel: string | null }) {
  const { pieces, events, near } = geometry
  const has = (look: 'soft' | 'hard' | 'undecided') =>
    events.some((event) => event.look === look && event.role !== 'none')
  const mark = (kind: 'soft' | 'hard' | 'undecided', hollow = false) => (
    <OnsetMark x={14} y={8} kind={kind} hollow={hollow} scale={0.85} />
  )
  const hollow = events.find((event) => event.kind === 'onset' && event.role === 'none')
  const hardGround = events.some((event) => event.look === 'hard' && event.role !== 'none')
  return (
    <ul aria-label="Key" className="flex flex-wrap gap-x-5 gap-y-1.5">
      {pieces.some((piece) => piece.stable) && <Entry picture={line('var(--color-ink)', 3.2, false)} words="stable" />}
      {pieces.some((piece) => !piece.stable) && (
        <Entry picture={line('var(--color-ink)', 2.2, true)} words="unstable" />
      )}
      {has('soft') && <Entry picture={mark('soft')} words="soft onset" />}
      {has('hard') && <Entry picture={mark('hard')} words="hard onset" />}
      {has('undecided') && <Entry picture={mark('undecided')} words="undecided onset" />}
      {hollow && <Entry picture={mark(hollow.look ?? 'undecided', true)} words="pair that is no limit" />}
      {events.some((event) => event.kind === 'turning-point') && (
        <Entry
          picture={<circle cx="14" cy="8" r="5" fill="none" stroke="var(--color-ink)" strokeWidth="2" />}
          words="turning point"
        />
      )}
      {events.some((event) => event.kind === 'branch-point') && (
        <Entry
          picture={
            <>
              <circle cx="14" cy="8" r="5" fill="none" stroke="var(--color-ink)" strokeWidth="2" />
              <circle cx="14" cy="8" r="1.6" fill="var(--color-ink)" />
            </>
          }
          words="branch point"
        />
      )}
      {near.some((curve) => curve.stable) && (
        <Entry picture={line('var(--color-soft)', 2.8, false)} words="near-onset prediction, stable" />
      )}
      {near.some((curve) => !curve.stable) && (
        <Entry picture={line('var(--color-hard)', 2.2, true)} words="near-onset prediction, unstable" />
      )}
      {hardGround && (
        <Entry
          picture={<path d="M14 0V16" stroke="var(--color-ink)" strokeWidth="2.2" strokeDasharray="5 3" />}
          words="undercut: where it comes back is not computed yet"
        />
      )}
      {earlierLabel && <Entry picture={line('var(--color-pencil)', 2.2, false)} words={earlierLabel} />}
    </ul>
  )
}
