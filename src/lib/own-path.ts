/** Where to go after signing in: a path of this library, or its beginning. Another site's address is never followed. */
export function ownPath(next: string | null): string {
  if (!next?.startsWith('/')) return '/'
  // What a browser would make of it decides: "//other" and "/\other" lead to another host.
  const here = 'http://own.invalid'
  let address: URL
  try {
    address = new URL(next, here)
  } catch {
    return '/'
  }
  if (address.origin !== here || address.pathname.startsWith('//') || address.pathname === '/sign-in') return '/'
  return address.pathname + address.search + address.hash
}
