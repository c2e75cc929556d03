import type { Page } from '#shared/api/pages.ts'
import { readAccess } from '#shared/api/roles.ts'
import { useChangePage } from '#src/api/pages.ts'
import { FaultText } from '#src/components/field.tsx'
import { Select } from '#src/components/select.tsx'

const words = {
  group: 'Readable by its group',
  'signed-in': 'Readable by all signed-in people',
  open: 'Open to everybody',
} as const

/** Who may read the revision in force beyond the group; only maintainers see it. */
export function PageAccess({ page }: { page: Page }) {
  const change = useChangePage(page.code)
  if (!page.may.includes('page:settings')) return null
  return (
    <span className="grid gap-1">
      <Select
        label="Read access"
        labelHidden
        value={page.access}
        options={readAccess.map((value) => ({ value, label: words[value] }))}
        onChange={(event) => {
          const access = readAccess.find((candidate) => candidate === event.target.value)
          if (access && access !== page.access) change.mutate({ access, etag: page.etag })
        }}
      />
      {change.error && <FaultText>{change.error.message}</FaultText>}
    </span>
  )
}
