import { useRef } from 'react'
import { useNavigate } from 'react-router-dom'
import { useSingleKeys } from '#src/hooks/use-single-keys.ts'

const places: Record<string, string> = { 1: '/', 2: '/reviews', 3: '/groups' }
/** How long a `0` waits for its second key. */
const waitMs = 1500

/** `/` find, `?` list of keys, `0` then a number a place. The numbers alone belong to the sections of a page. */
export function usePlaceKeys(onHelp: () => void): void {
  const navigate = useNavigate()
  const zeroAt = useRef(Number.NEGATIVE_INFINITY)
  useSingleKeys((key) => {
    const second = Date.now() - zeroAt.current < waitMs
    zeroAt.current = Number.NEGATIVE_INFINITY
    if (key === '0') {
      zeroAt.current = Date.now()
      return true
    }
    const place = second ? places[key] : undefined
    if (place !== undefined) {
      navigate(place)
      return true
    }
    if (key === '?') {
      onHelp()
      return true
    }
    if (key !== '/') return false
    const field = document.querySelector<HTMLInputElement>('[data-find]')
    if (field && field.offsetParent !== null) field.focus()
    else navigate('/', { state: { find: true } })
    return true
  })
}
