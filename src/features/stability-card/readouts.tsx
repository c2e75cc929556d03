import { classes } from '#src/lib/class-names.ts'
import { FigureText } from './figure-text.tsx'
import type { Readout } from './geometry/readouts.ts'

/** The numbers for copying: a ruled strip beside or under the drawing, rows where there is no width. */
export function Readouts({
  readouts,
  label,
  older,
  wide,
}: {
  readouts: readonly Readout[]
  label: string
  older: boolean
  /** One row where the card is wide enough for it. */
  wide: boolean
}) {
  return (
    <dl
      aria-label={label}
      className={classes(
        'grid gap-px border-y-[1.5px] border-ink bg-rule @min-[560px]:border-[1.5px]',
        readouts.length > 1 && '@min-[560px]:grid-cols-3',
        readouts.length > 1 && wide && '@min-[1180px]:grid-cols-6',
        older && 'card-older-words',
      )}
    >
      {readouts.map((readout) => (
        <div
          key={readout.label}
          className={classes(
            'grid grid-cols-[1fr_auto] content-start items-baseline gap-x-3 py-2 @min-[560px]:grid-cols-1 @min-[560px]:px-3',
            readout.changed ? 'bg-pencil-tint' : 'bg-sheet',
          )}
        >
          <dt className="text-label text-ink-2">{readout.label}</dt>
          <dd className="text-right @min-[560px]:text-left">
            <span
              className={classes(
                'figures text-readout whitespace-nowrap',
                readout.changed ? 'font-[680]' : 'font-[420]',
              )}
            >
              <FigureText text={readout.figure} />
            </span>{' '}
            {readout.unit && <span className="text-note whitespace-nowrap">{readout.unit}</span>}
          </dd>
          <dd className="col-span-full text-label text-ink-2">
            <FigureText text={readout.note} />
          </dd>
        </div>
      ))}
    </dl>
  )
}
