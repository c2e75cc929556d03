/**
 * The canonical form of a JSON value (RFC 8785, JSON Canonicalization Scheme): no white space, members sorted by the
 * UTF-16 code units of their names, numbers as ECMAScript writes them. Members that are undefined are absent.
 *
 * @throws {RangeError} for a number that is not finite, a lone surrogate or a value JSON cannot hold: such a value must
 *   have been refused before (section 3.1 of the RFC asks for an error).
 */
export function canonicalJson(value: unknown): string {
  if (value === null || typeof value === 'boolean') return String(value)
  if (typeof value === 'number') {
    if (!Number.isFinite(value)) throw new RangeError('A number that is not finite has no JSON form')
    return JSON.stringify(value)
  }
  if (typeof value === 'string') {
    if (/\p{Cs}/u.test(value)) throw new RangeError('A lone surrogate has no canonical JSON form')
    return JSON.stringify(value)
  }
  if (Array.isArray(value)) return `[${value.map(canonicalJson).join(',')}]`
  if (typeof value !== 'object') throw new RangeError(`A ${typeof value} has no JSON form`)
  const members = Object.entries(value).filter(([, member]) => member !== undefined)
  // Comparing strings with < compares their UTF-16 code units, as section 3.2.3 asks.
  members.sort(([a], [b]) => (a < b ? -1 : a > b ? 1 : 0))
  return `{${members.map(([name, member]) => `${canonicalJson(name)}:${canonicalJson(member)}`).join(',')}}`
}
