import { Plus } from 'lucide-react'
import { useState } from 'react'
import { Navigate, useParams } from 'react-router-dom'
import { useMe } from '#src/api/session.ts'
import { Button } from '#src/components/button.tsx'
import { SectionBar } from '#src/components/section-bar.tsx'
import { AdminGroups } from '#src/features/administration/admin-groups.tsx'
import { AdminNewGroup } from '#src/features/administration/admin-new-group.tsx'
import { AdminPeople } from '#src/features/administration/admin-people.tsx'
import { NothingHere } from './nothing-here-page.tsx'

/** People and groups, for administrators. */
export function AdminPage() {
  const { tab } = useParams()
  const me = useMe()
  const [making, setMaking] = useState(false)
  if (!me?.administrator) return <NothingHere what="administration here" />
  if (tab !== 'people' && tab !== 'groups') return <Navigate to="/admin/people" replace />
  return (
    <main className="grid grid-cols-[minmax(0,1fr)] content-start gap-3 px-4 py-4 tablet:px-6">
      <title>{`${tab === 'people' ? 'People' : 'Groups'} · Administration · Brinkbook`}</title>
      <h1 className="text-title">Administration</h1>
      <SectionBar
        label="Parts of administration"
        sections={[
          { to: '/admin/people', label: 'People', current: tab === 'people' },
          { to: '/admin/groups', label: 'Groups', current: tab === 'groups' },
        ]}
      >
        {tab === 'groups' && (
          <Button look="first" icon={<Plus aria-hidden className="size-4" />} onClick={() => setMaking(true)}>
            New group
          </Button>
        )}
      </SectionBar>
      {tab === 'people' ? <AdminPeople /> : <AdminGroups onNew={() => setMaking(true)} />}
      <AdminNewGroup open={making} onClose={() => setMaking(false)} />
    </main>
  )
}
