import { useEffect, useState } from 'react'
import { onAnnounce } from '#src/lib/announce.ts'

/** Where announce() is read out. Stands once, in the shell, so that it outlives every screen. */
export function LiveRegion() {
  const [said, setSaid] = useState({ text: '', turn: 0 })
  useEffect(() => onAnnounce((text) => setSaid((before) => ({ text, turn: before.turn + 1 }))), [])
  return (
    <div aria-live="polite" className="sr-only">
      {/* A new element each time: the same words twice are read twice. */}
      <span key={said.turn}>{said.text}</span>
    </div>
  )
}
