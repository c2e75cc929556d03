import { Search } from 'lucide-react'
import { type ReactNode, useState } from 'react'
import { Link, useNavigate } from 'react-router-dom'
import { classes } from '#src/lib/class-names.ts'
import { Mark } from './mark.tsx'

export interface Place {
  to: string
  label: string
  count?: number
  current: boolean
}

export interface TopBarProps {
  places: readonly Place[]
  /** Field for finding a model; not where the screen has its own. */
  search: boolean
  /** Account menu or the way to sign in. */
  account: ReactNode
}

/** The places of the product, the find field and the account. Below bench the places stand in the menu. */
export function TopBar({ places, search, account }: TopBarProps) {
  return (
    <header className="border-b-[1.5px] border-ink bg-sheet">
      <a
        href="#main"
        className="sr-only focus:not-sr-only focus:absolute focus:z-50 focus:m-2 focus:rounded-control focus:bg-sheet focus:p-3"
      >
        To the content
      </a>
      <div className="flex min-h-12 items-center gap-4 px-4 tablet:px-6">
        <Link to="/" className="flex min-h-11 items-center gap-2.5 text-ink no-underline bench:min-h-8">
          <Mark size={26} />
          <span className="text-[1.1875rem] font-[720]">Brinkbook</span>
        </Link>
        <nav aria-label="Places" className="hidden self-stretch tablet:flex">
          <ul className="ml-2 flex gap-5">
            {places.map((place) => (
              <li key={place.to} className="flex">
                <Link
                  to={place.to}
                  aria-current={place.current ? 'page' : undefined}
                  className={classes(
                    '-mb-[1.5px] flex min-w-6 items-center gap-1.5 border-b-[3px] pt-[3px] text-ink no-underline',
                    place.current ? 'border-pencil font-[680]' : 'border-transparent hover:border-rule',
                  )}
                >
                  {place.label}
                  {place.count !== undefined && place.count > 0 && (
                    <span className="text-label">
                      {place.count}
                      <span className="sr-only"> waiting</span>
                    </span>
                  )}
                </Link>
              </li>
            ))}
          </ul>
        </nav>
        <div className="ml-auto flex items-center gap-3">
          {search && <FindField />}
          {search && (
            <Link
              to="/"
              state={{ find: true }}
              aria-label="Find a model"
              className="grid size-11 place-items-center rounded-control text-ink hover:bg-pencil-tint bench:hidden"
            >
              <Search aria-hidden className="size-5" />
            </Link>
          )}
          {account}
        </div>
      </div>
    </header>
  )
}

/** Leads to the library with what was typed. `/` puts the focus here. */
function FindField() {
  const navigate = useNavigate()
  const [text, setText] = useState('')
  return (
    <search className="hidden bench:block">
      <form
        onSubmit={(event) => {
          event.preventDefault()
          navigate(text.trim() === '' ? '/' : `/?q=${encodeURIComponent(text.trim())}`)
          setText('')
        }}
        className="relative w-80"
      >
        <Search
          aria-hidden
          className="pointer-events-none absolute top-1/2 left-2.5 size-4 -translate-y-1/2 text-ink-2"
        />
        <input
          type="search"
          aria-label="Find a model, symbol or source"
          aria-keyshortcuts="/"
          data-find
          placeholder="Find a model, symbol or source"
          value={text}
          onChange={(event) => setText(event.target.value)}
          className="min-h-8 w-full rounded-control border border-line bg-well pr-9 pl-8 text-note"
        />
        <kbd
          aria-hidden
          className="figures pointer-events-none absolute top-1/2 right-2 -translate-y-1/2 rounded-[2px] border border-line px-1.5 text-tick text-ink-2"
        >
          /
        </kbd>
      </form>
    </search>
  )
}
