import { onsetKinds, rowStates } from '#shared/api/pages.ts'
import type { LibraryFilters } from '#src/api/pages.ts'

/** The library's choices live in the address: `?q=...&onset=hard&onset=soft&state=draft&group=...&sort=code`. What it does not know is left out. */
export function filtersOf(search: URLSearchParams): LibraryFilters {
  const among = <Value extends string>(name: string, known: readonly Value[]) => {
    const given = search.getAll(name)
    const chosen = known.filter((value) => given.includes(value))
    return chosen.length > 0 ? chosen : undefined
  }
  const q = search.get('q')?.trim().slice(0, 200)
  const groups = search.getAll('group').filter((slug) => /^[a-z0-9]+(-[a-z0-9]+)*$/.test(slug))
  const sort = search.get('sort')
  return {
    q: q === '' || q === undefined ? undefined : q,
    onset: among('onset', onsetKinds),
    state: among('state', rowStates),
    group: groups.length > 0 ? groups.slice(0, 50) : undefined,
    sort: sort === 'code' || sort === 'title' ? sort : undefined,
  }
}

/** The address of a set of choices: the opposite of filtersOf. */
export function searchOf(filters: LibraryFilters): URLSearchParams {
  const search = new URLSearchParams()
  if (filters.q) search.set('q', filters.q)
  for (const name of ['onset', 'state', 'group'] as const) {
    for (const value of filters[name] ?? []) search.append(name, value)
  }
  if (filters.sort && filters.sort !== 'changed') search.set('sort', filters.sort)
  return search
}

/** The list with one value put in or taken out; undefined where nothing is left, which means no narrowing. */
export function toggled<Value extends string>(list: readonly Value[] | undefined, value: Value): Value[] | undefined {
  const next = list?.includes(value) ? list.filter((item) => item !== value) : [...(list ?? []), value]
  return next.length > 0 ? next : undefined
}
