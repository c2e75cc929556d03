import { useMe } from '#src/api/session.ts'
import { InitialsRing } from '#src/components/initials-ring.tsx'
import type { DraftConnection } from './draft-connection.ts'
import { usePresence } from './use-draft-connection.ts'

/** Everybody who has the draft open, as initials in rings; names for screen readers and on the pointer. */
export function PresenceRings({ connection }: { connection: DraftConnection }) {
  const people = usePresence(connection, useMe())
  if (people.length === 0) return null
  const words = people.map((person) => (person.own ? `${person.name} (you)` : person.name)).join(', ')
  return (
    <span className="inline-flex items-center" role="img" aria-label={`Here now: ${words}`}>
      {people.slice(0, 6).map((person, index) => (
        <span key={person.id} className={index > 0 ? '-ml-1.5' : ''}>
          <InitialsRing name={person.name} own={person.own} />
        </span>
      ))}
      {people.length > 6 && <span className="ml-1.5 text-note text-ink-2">and {people.length - 6} more</span>}
    </span>
  )
}
