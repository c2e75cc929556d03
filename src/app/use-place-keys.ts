import { useLocation, useNavigate } from 'react-router-dom'
import { useSingleKeys } from '#src/hooks/use-single-keys.ts'
import { awaitsPlace, beginPlaceKey, endPlaceKey } from '#src/lib/single-keys.ts'

const places: Record<string, string> = { 1: '/', 2: '/reviews', 3: '/groups' }

/** `/` find, `?` list of keys, `0` then a number a place, `e` edit where the page offers it. */
export function usePlaceKeys(onHelp: () => void): void {
  const navigate = useNavigate()
  const { pathname } = useLocation()
  useSingleKeys((key) => {
    const place = awaitsPlace(Date.now()) ? places[key] : undefined
    endPlaceKey()
    if (key === '0') beginPlaceKey(Date.now())
    else if (place !== undefined) navigate(place)
    else if (key === '?') onHelp()
    else if (key === '/') find(() => navigate('/', { state: { find: true } }))
    else if (key === 'e') return edit(pathname, navigate)
    else return false
    return true
  })
}

function find(elsewhere: () => void): void {
  const field = document.querySelector<HTMLInputElement>('[data-find]')
  if (field && field.offsetParent !== null) field.focus()
  else elsewhere()
}

/** Only what the page itself offers: where its link to the draft is not shown, the key means nothing. */
function edit(pathname: string, navigate: (to: string) => void): boolean {
  const page = /^\/m\/[^/]+/.exec(pathname)?.[0]
  const address = `${page}/edit`
  if (page === undefined || pathname === address || !document.querySelector(`main a[href="${CSS.escape(address)}"]`))
    return false
  navigate(address)
  return true
}
