import { useState } from 'react'
import { useNavigate, useSearchParams } from 'react-router-dom'
import type { Me } from '#shared/api/session.ts'
import { type NewPage, useCreatePage } from '#src/api/pages.ts'
import { useMe } from '#src/api/session.ts'
import { ButtonLink } from '#src/components/button.tsx'
import { Select } from '#src/components/select.tsx'
import { StateSheet } from '#src/components/state-sheet.tsx'
import { BringIn } from '#src/features/new-model/bring-in.tsx'
import { WriteEquations } from '#src/features/new-model/write-equations.tsx'
import { useActKey } from '#src/hooks/use-act-key.ts'
import { announce } from '#src/lib/announce.ts'

/** Begins a page: with equations typed from nothing, or with a model document. */
export function NewModelPage() {
  const groups = (useMe()?.groups ?? []).filter((group) => group.role !== 'reader' && group.prefixes.length > 0)
  return (
    <main className="grid grid-cols-[minmax(0,1fr)] content-start gap-4 px-4 py-4 tablet:px-6">
      <title>New model · Brinkbook</title>
      {groups.length === 0 ? (
        <StateSheet
          level={1}
          title="Only contributors and maintainers begin pages"
          acts={<ButtonLink to="/">To the Library</ButtonLink>}
        >
          You are a reader in every group you are in. A maintainer can give you another role.
        </StateSheet>
      ) : (
        <NewModel groups={groups} />
      )}
    </main>
  )
}

function NewModel({ groups }: { groups: Me['groups'] }) {
  const [search] = useSearchParams()
  const navigate = useNavigate()
  const create = useCreatePage()
  const asked = search.get('group')
  const [slug, setSlug] = useState(groups.find((group) => group.slug === asked)?.slug ?? groups[0]?.slug ?? '')
  const [letters, setLetters] = useState<string | null>(null)
  const [way, setWay] = useState<'write' | 'bring-in' | null>(null)
  const keyOf = useActKey()

  const prefixes = groups.find((group) => group.slug === slug)?.prefixes ?? []
  const prefix = letters !== null && prefixes.includes(letters) ? letters : (prefixes[0] ?? '')
  const start = (by: 'write' | 'bring-in', body: Pick<NewPage, 'title' | 'summary' | 'field' | 'document'>) => {
    setWay(by)
    const page = { ...body, group: slug, prefix }
    create.mutate(
      { ...page, key: keyOf(page) },
      {
        onSuccess: ({ code }) => {
          announce(`${code} begun`)
          navigate(`/m/${code}/edit`)
        },
      },
    )
  }
  const stateOf = (by: 'write' | 'bring-in') => ({
    pending: create.isPending && way === by,
    error: way === by ? create.error : null,
  })
  return (
    <>
      <div className="flex flex-wrap items-end gap-x-4 gap-y-2">
        <h1 className="basis-full text-title tablet:basis-auto">New model</h1>
        <Select
          label="Kept for"
          className="min-w-56"
          value={slug}
          onChange={(event) => setSlug(event.target.value)}
          options={groups.map((group) => ({ value: group.slug, label: group.name }))}
        />
        <Select
          label="Code begins with"
          className="min-w-28"
          value={prefix}
          onChange={(event) => setLetters(event.target.value)}
          options={prefixes.map((value) => ({ value, label: value }))}
        />
        <p className="pb-1.5 text-ink-2">Members see it until it is in force; its number follows when it is begun.</p>
      </div>
      <div className="grid items-stretch gap-4 bench:grid-cols-2">
        <WriteEquations {...stateOf('write')} onStart={(body) => start('write', body)} />
        <BringIn {...stateOf('bring-in')} onStart={(body) => start('bring-in', body)} />
      </div>
    </>
  )
}
