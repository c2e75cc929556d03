import { type ReactNode, useId } from 'react'
import { Mark } from './mark.tsx'

/** A screen that stands alone: one sheet on a ledge, another beside it on the ground where there is room. */
export function LedgePage({ children, beside }: { children: ReactNode; beside?: ReactNode }) {
  return (
    <main className="flex flex-1 flex-col">
      <div className="mt-auto grid items-end pt-8 bench:grid-cols-[1fr_400px_1fr] bench:pt-16">
        <div className="sheet relative z-10 mx-auto w-[min(400px,100%-2rem)] px-6 py-8 tablet:px-8 bench:col-start-2 bench:w-full">
          <p className="mb-5 flex items-center gap-3.5">
            <Mark size={44} />
            <span className="text-[2rem] leading-9 font-[720]">Brinkbook</span>
          </p>
          {children}
        </div>
        {beside && (
          <div className="hidden justify-end pr-4 pl-6 bench:col-start-1 bench:row-start-1 bench:flex">{beside}</div>
        )}
      </div>
      <div className="ledge" aria-hidden>
        <div className="ledge-lip">
          <Hatch />
        </div>
        <div className="ledge-ground">
          <Hatch />
        </div>
        <div className="ledge-underside" />
        <div className="ledge-void" />
      </div>
      {beside && <div className="mx-auto mt-4 w-[min(400px,100%-2rem)] bench:hidden">{beside}</div>}
      <p className="mt-auto px-6 py-6 text-right text-note text-ink-2">
        A model result. Not a clearance, certificate or operating limit.
      </p>
    </main>
  )
}

function Hatch() {
  const id = useId()
  return (
    <svg aria-hidden>
      <pattern id={id} width="9" height="9" patternUnits="userSpaceOnUse">
        <path d="M-1 1L1 -1M0 9L9 0M8 10L10 8" className="hatch-line" strokeWidth="1" />
      </pattern>
      <rect width="100%" height="100%" fill={`url(#${id})`} />
    </svg>
  )
}
