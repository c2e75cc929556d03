import { type ComponentProps, type ReactNode, useId } from 'react'
import { Link, type LinkProps } from 'react-router-dom'
import { classes } from '#src/lib/class-names.ts'

export type ButtonLook = 'first' | 'plain' | 'quiet'

const base =
  'inline-flex min-h-11 items-center justify-center gap-2 rounded-control px-3.5 text-center font-[620] no-underline bench:min-h-8 bench:text-note aria-disabled:opacity-100'
const looks: Record<ButtonLook, string> = {
  first: 'border-[1.5px] border-ink bg-ink text-sheet hover:bg-ink-2 hover:border-ink-2',
  plain: 'border-[1.5px] border-ink bg-sheet text-ink hover:bg-pencil-tint',
  quiet: 'border-[1.5px] border-transparent text-ink hover:bg-pencil-tint',
}
const unavailableLook = 'border-[1.5px] border-dashed border-line bg-well text-ink-3'

export interface ButtonProps extends Omit<ComponentProps<'button'>, 'disabled'> {
  look?: ButtonLook
  /** The act is under way: the button keeps its place and takes no second press. */
  pending?: boolean
  /** Why the act is not available now. The button stays in the tab order, so that everybody can read why. */
  unavailable?: string | null | false
  /** False hides the reason's text: the caller shows it elsewhere (it is still the button's description). */
  showReason?: boolean
  icon?: ReactNode
}

/** An act. The word names it and the message afterwards repeats it: "Send for review" gives "Sent for review". */
export function Button(props: ButtonProps) {
  const {
    look = 'plain',
    pending = false,
    unavailable,
    showReason = true,
    icon,
    children,
    className,
    onClick,
    ...rest
  } = props
  const reasonId = useId()
  const blocked = pending || Boolean(unavailable)
  const button = (
    <button
      type="button"
      {...rest}
      aria-disabled={blocked || undefined}
      aria-busy={pending || undefined}
      aria-describedby={unavailable ? reasonId : rest['aria-describedby']}
      onClick={(event) => {
        if (blocked) event.preventDefault()
        else onClick?.(event)
      }}
      className={classes(base, unavailable ? unavailableLook : looks[look], className)}
    >
      {icon}
      {children}
    </button>
  )
  if (!unavailable) return button
  return (
    <span className="inline-flex flex-wrap items-center gap-x-3 gap-y-1">
      {button}
      <span id={reasonId} className={showReason ? 'text-note text-ink-2' : 'sr-only'}>
        {unavailable}
      </span>
    </span>
  )
}

/** A link that looks like a button: it leads somewhere, it does not act. */
export function ButtonLink({
  look = 'plain',
  icon,
  className,
  children,
  ...rest
}: LinkProps & { look?: ButtonLook; icon?: ReactNode }) {
  return (
    <Link {...rest} className={classes(base, looks[look], className)}>
      {icon}
      {children}
    </Link>
  )
}

/** An act without the look of one, in running text. */
export function LinkButton({ className, ...rest }: ComponentProps<'button'>) {
  return <button type="button" {...rest} className={classes('link min-h-6 text-left max-bench:min-h-11', className)} />
}
