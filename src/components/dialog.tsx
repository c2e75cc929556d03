import { X } from 'lucide-react'
import { type ReactNode, useEffect, useId, useRef } from 'react'
import { classes } from '#src/lib/class-names.ts'

export interface DialogProps {
  title: string
  open: boolean
  onClose: () => void
  children: ReactNode
  /** 'middle' asks; 'side' is a sheet at the right edge that says a consequence beside what it concerns. */
  place?: 'middle' | 'side'
}

/** A sheet over the page. The browser's own dialog keeps the focus inside, closes on Escape and gives the focus back. */
export function Dialog({ title, open, onClose, children, place = 'middle' }: DialogProps) {
  const dialog = useRef<HTMLDialogElement>(null)
  const heading = useId()

  useEffect(() => {
    const element = dialog.current
    if (!element) return
    if (open && !element.open) element.showModal()
    if (!open && element.open) element.close()
  }, [open])

  return (
    // Escape and the button close it for everybody; a press on the backdrop is a convenience of the pointer only.
    // biome-ignore lint/a11y/useKeyWithClickEvents: see above
    <dialog
      ref={dialog}
      aria-labelledby={heading}
      onClose={onClose}
      onClick={(event) => {
        if (event.target === dialog.current) dialog.current.close()
      }}
      className={classes(
        'sheet border-[1.5px] border-ink p-0 text-ink',
        place === 'middle' && 'm-auto w-[min(34rem,calc(100vw-2rem))] max-h-[calc(100dvh-2rem)]',
        place === 'side' && 'mr-0 ml-auto h-dvh max-h-none w-[min(30rem,calc(100vw-2rem))]',
      )}
    >
      {open && (
        <div className="grid gap-4 p-5">
          <div className="flex items-start justify-between gap-4">
            <h2 id={heading} className="text-subtitle">
              {title}
            </h2>
            <button
              type="button"
              onClick={() => dialog.current?.close()}
              aria-label="Close"
              className="-m-1.5 grid size-11 shrink-0 place-items-center rounded-control hover:bg-pencil-tint bench:size-8"
            >
              <X aria-hidden className="size-4" />
            </button>
          </div>
          {children}
        </div>
      )}
    </dialog>
  )
}
