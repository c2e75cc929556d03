import type { ReactNode } from 'react'
import { Link, useNavigate } from 'react-router-dom'
import { useSingleKeys } from '#src/hooks/use-single-keys.ts'
import { classes } from '#src/lib/class-names.ts'
import { awaitsPlace } from '#src/lib/single-keys.ts'

export interface Section {
  to: string
  label: string
  count?: number
  /** Several may be lit at once (co-edit view: Model and Behaviour). */
  current: boolean
}

/**
 * The sections of a page, with counts; `1` is the first. A lit one is bold and underlined in pencil; they scroll
 * sideways on a phone.
 */
export function SectionBar({
  label,
  sections,
  children,
}: {
  label: string
  sections: readonly Section[]
  children?: ReactNode
}) {
  const navigate = useNavigate()
  useSingleKeys((key) => {
    const section = /^[1-9]$/.test(key) && !awaitsPlace(Date.now()) ? sections[Number(key) - 1] : undefined
    if (section) navigate(section.to)
    return section !== undefined
  })
  return (
    <div className="flex flex-wrap items-center justify-between gap-x-4 gap-y-2">
      <nav aria-label={label} className="-mx-2 -my-1 min-w-0 overflow-x-auto px-2 py-2">
        <ul className="flex gap-5">
          {sections.map((section) => (
            <li key={section.label}>
              <Link
                to={section.to}
                aria-current={section.current ? 'page' : undefined}
                className={classes(
                  'flex min-h-11 items-center gap-1.5 border-b-[3px] whitespace-nowrap text-ink no-underline bench:min-h-8',
                  section.current ? 'border-pencil font-[680]' : 'border-transparent hover:border-rule',
                )}
              >
                {section.label}
                {section.count !== undefined && (
                  <span className="text-label font-[400] text-ink-2">{section.count}</span>
                )}
              </Link>
            </li>
          ))}
        </ul>
      </nav>
      {children && <div className="flex flex-wrap items-center gap-2">{children}</div>}
    </div>
  )
}
