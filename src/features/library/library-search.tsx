import { Search } from 'lucide-react'
import { useEffect, useRef, useState } from 'react'
import { useLocation } from 'react-router-dom'
import { z } from 'zod'

const cameToFind = z.object({ find: z.literal(true) })
/** Rest after the last key before the list is asked again. */
const restMs = 250

/** The find field of the library. What is typed goes into the address after a short rest, or at once on Enter. */
export function LibrarySearch({ q, onChange }: { q: string; onChange: (q: string | undefined) => void }) {
  const [typed, setTyped] = useState<string | null>(null)
  const field = useRef<HTMLInputElement>(null)
  const { state, key } = useLocation()

  // `/` pressed on a screen without a field leads here.
  // biome-ignore lint/correctness/useExhaustiveDependencies: each arrival counts, also one with the same state
  useEffect(() => {
    if (cameToFind.safeParse(state).success) field.current?.focus()
  }, [state, key])

  const settle = (text: string) => {
    setTyped(null)
    if (text.trim() !== q) onChange(text.trim() === '' ? undefined : text.trim())
  }
  useEffect(() => {
    if (typed === null) return
    const timer = setTimeout(() => settle(typed), restMs)
    return () => clearTimeout(timer)
  })

  return (
    <search className="relative min-w-0 flex-1 basis-60">
      <form
        onSubmit={(event) => {
          event.preventDefault()
          if (typed !== null) settle(typed)
        }}
      >
        <Search
          aria-hidden
          className="pointer-events-none absolute top-1/2 left-3.5 size-4 -translate-y-1/2 text-ink-2"
        />
        <input
          ref={field}
          type="search"
          data-find
          aria-label="Find by name, symbol, parameter or source"
          aria-keyshortcuts="/"
          placeholder="name, symbol, parameter or source"
          maxLength={200}
          value={typed ?? q}
          onChange={(event) => setTyped(event.target.value)}
          className="min-h-11 w-full rounded-control border-[1.5px] border-ink bg-sheet pr-3 pl-10 bench:min-h-10"
        />
      </form>
    </search>
  )
}
