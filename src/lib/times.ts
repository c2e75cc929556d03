const day = new Intl.DateTimeFormat('en-GB', { day: 'numeric', month: 'short', year: 'numeric' })
const dayUtc = new Intl.DateTimeFormat('en-GB', { day: 'numeric', month: 'short', year: 'numeric', timeZone: 'UTC' })
const clock = new Intl.DateTimeFormat('en-GB', { hour: '2-digit', minute: '2-digit' })
const full = new Intl.DateTimeFormat('en-GB', { dateStyle: 'medium', timeStyle: 'short' })

/** "9 Nov 2026" in the viewer's zone. */
export const dayOf = (iso: string): string => day.format(new Date(iso))
/** "9 Nov 2026 UTC": for signatures, which say their zone. */
export const utcDay = (iso: string): string => `${dayUtc.format(new Date(iso))} UTC`
/** "09:41" in the viewer's zone. */
export const clockOf = (iso: string): string => clock.format(new Date(iso))
/** "1 Dec 2026, 13:07" in the viewer's zone. */
export const momentOf = (iso: string): string => full.format(new Date(iso))

/** "1 Dec 2026, 13:07 (UTC+01:00)": for title attributes, so that the zone is never in doubt. */
export function momentWithOffset(iso: string): string {
  const date = new Date(iso)
  const minutes = -date.getTimezoneOffset()
  const two = (value: number) => String(value).padStart(2, '0')
  const sign = minutes < 0 ? '\u2212' : '+'
  const size = Math.abs(minutes)
  return `${full.format(date)} (UTC${sign}${two(Math.floor(size / 60))}:${two(size % 60)})`
}
