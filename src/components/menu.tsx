import { DropdownMenu } from 'radix-ui'
import type { ReactNode } from 'react'
import { Link } from 'react-router-dom'

const item =
  'flex min-h-11 items-center gap-2.5 rounded-control px-3 text-body text-ink no-underline outline-none data-highlighted:bg-pencil-tint data-highlighted:shadow-[inset_3px_0_0_var(--color-ink)] bench:min-h-8'

/** A list of acts behind a button. `trigger` is the button itself (it must take a ref and props). */
export function Menu({ trigger, label, children }: { trigger: ReactNode; label: string; children: ReactNode }) {
  return (
    // Not modal: the page behind stays readable and no style sheet is added to it.
    <DropdownMenu.Root modal={false}>
      <DropdownMenu.Trigger asChild>{trigger}</DropdownMenu.Trigger>
      <DropdownMenu.Portal>
        <DropdownMenu.Content
          align="end"
          sideOffset={6}
          collisionPadding={8}
          aria-label={label}
          className="z-50 min-w-52 max-w-80 animate-[menu-in_90ms_ease-out] rounded-sheet border-[1.5px] border-ink bg-sheet p-1.5 shadow-sheet"
        >
          {children}
        </DropdownMenu.Content>
      </DropdownMenu.Portal>
    </DropdownMenu.Root>
  )
}

export function MenuAct({ onSelect, children }: { onSelect: () => void; children: ReactNode }) {
  return (
    <DropdownMenu.Item className={item} onSelect={onSelect}>
      {children}
    </DropdownMenu.Item>
  )
}

export function MenuLink({ to, children }: { to: string; children: ReactNode }) {
  return (
    <DropdownMenu.Item className={item} asChild>
      <Link to={to}>{children}</Link>
    </DropdownMenu.Item>
  )
}

/** A line of text in a menu that is not an act. */
export function MenuNote({ children }: { children: ReactNode }) {
  return <DropdownMenu.Label className="px-3 py-1.5 text-note text-ink-2">{children}</DropdownMenu.Label>
}

export function MenuRule() {
  return <DropdownMenu.Separator className="my-1.5 h-px bg-rule" />
}
