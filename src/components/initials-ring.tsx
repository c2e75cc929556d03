import { initials } from '#src/lib/initials.ts'

/** A person as two letters in a ring; filled for the viewer. The name stands beside it or in `title`. */
export function InitialsRing({ name, own = false, size = 28 }: { name: string; own?: boolean; size?: number }) {
  return (
    <span
      aria-hidden
      title={name}
      className={`inline-grid shrink-0 place-items-center rounded-round border-[1.5px] border-ink text-[0.6875rem] font-[680] leading-none ${own ? 'bg-ink text-sheet' : 'bg-sheet text-ink'}`}
      style={{ width: size, height: size }}
    >
      {initials(name)}
    </span>
  )
}
