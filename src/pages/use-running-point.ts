import { useSearchParams } from 'react-router-dom'

/** The viewer's own running point, kept in the address (`?at=`), so that it can be handed on; null is the page's value. */
export function useRunningPoint(): [number | null, (at: number | null) => void] {
  const [search, setSearch] = useSearchParams()
  const text = search.get('at')
  const value = text === null || text.trim() === '' ? Number.NaN : Number(text)
  const set = (at: number | null) =>
    setSearch(
      (before) => {
        const next = new URLSearchParams(before)
        if (at === null) next.delete('at')
        // In full: on a narrow range (1000 to 1001) fewer digits would be another point.
        else next.set('at', String(at))
        return next
      },
      { replace: true, preventScrollReset: true },
    )
  return [Number.isFinite(value) ? value : null, set]
}
