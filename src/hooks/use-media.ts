import { useSyncExternalStore } from 'react'

/** Whether a media query holds, and again when that changes. Where there is no window: false. */
export function useMedia(query: string): boolean {
  return useSyncExternalStore(
    (tell) => {
      const list = matchMedia(query)
      list.addEventListener('change', tell)
      return () => list.removeEventListener('change', tell)
    },
    () => matchMedia(query).matches,
    () => false,
  )
}

/** Below the tablet width: pages are read and remarked on, nothing is signed. */
export const usePhone = (): boolean => useMedia('(width < 48rem)')
