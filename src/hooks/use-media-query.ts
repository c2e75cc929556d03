import { useCallback, useSyncExternalStore } from 'react'

/** Whether a media query holds, and again whenever that changes. */
export function useMediaQuery(query: string): boolean {
  const subscribe = useCallback(
    (listener: () => void) => {
      const list = window.matchMedia(query)
      list.addEventListener('change', listener)
      return () => list.removeEventListener('change', listener)
    },
    [query],
  )
  return useSyncExternalStore(subscribe, () => window.matchMedia(query).matches)
}

/** Below the `tablet:` width of the styles: screens for reading. */
export const phoneWidth = '(width < 48rem)'
