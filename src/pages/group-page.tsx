import { useQuery } from '@tanstack/react-query'
import { Plus } from 'lucide-react'
import { useState } from 'react'
import { useParams } from 'react-router-dom'
import { ApiProblem } from '#src/api/api-problem.ts'
import { groupQuery } from '#src/api/groups.ts'
import { useViewer } from '#src/api/session.ts'
import { Button, ButtonLink } from '#src/components/button.tsx'
import { Waiting } from '#src/components/pencil-line.tsx'
import { SectionBar } from '#src/components/section-bar.tsx'
import { StateSheet } from '#src/components/state-sheet.tsx'
import { TitleBlock } from '#src/components/title-block.tsx'
import { GroupInvite } from '#src/features/groups/group-invite.tsx'
import { GroupModels } from '#src/features/groups/group-models.tsx'
import { GroupPeople } from '#src/features/groups/group-people.tsx'
import { roleWord } from '#src/lib/role-words.ts'
import { NothingHere } from './nothing-here-page.tsx'

/** A group: its models, and its people. */
export function GroupPage() {
  const { group: slug = '', section } = useParams()
  const group = useQuery(groupQuery(useViewer(), slug))
  const [inviting, setInviting] = useState(false)

  if (group.isPending) return <Waiting what="Reading the group" />
  if (group.isError) {
    const refused = group.error instanceof ApiProblem && [400, 403, 404].includes(group.error.status)
    if (refused) return <NothingHere what={`group ${slug}`} />
    return (
      <main className="grid flex-1 place-items-center p-6">
        <title>Group · Brinkbook</title>
        <StateSheet
          urgent
          level={1}
          title="The library did not answer"
          acts={<Button onClick={() => group.refetch()}>Try again now</Button>}
        >
          {group.error.message}
        </StateSheet>
      </main>
    )
  }
  const { name, prefixes, pageCount, memberCount, role, mayInvite, members } = group.data
  const onPeople = section === 'people'
  const maintainers = members.filter((member) => member.role === 'maintainer')
  return (
    <main className="grid grid-cols-[minmax(0,1fr)] content-start gap-3 px-4 py-3 tablet:px-6">
      <title>{`${onPeople ? `People of ${name}` : name} · Brinkbook`}</title>
      <TitleBlock
        title={name}
        note={role === null ? 'You are not a member.' : `You are a ${roleWord[role].toLowerCase()} here.`}
        cells={[
          { label: 'Models', value: pageCount },
          { label: 'People', value: memberCount, drops: 'second' },
          { label: 'Letters', value: <span className="figures text-note">{prefixes.join(', ')}</span> },
          {
            label: maintainers.length === 1 ? 'Maintainer' : 'Maintainers',
            value: maintainers.length > 2 ? maintainers.length : maintainers.map((one) => one.person.name).join(', '),
            drops: 'first',
          },
        ]}
      />
      <SectionBar
        label="Sections of the group"
        sections={[
          { to: `/groups/${slug}`, label: 'Models', count: pageCount, current: !onPeople },
          { to: `/groups/${slug}/people`, label: 'People', count: memberCount, current: onPeople },
        ]}
      >
        {onPeople && mayInvite && (
          <Button look="first" icon={<Plus aria-hidden className="size-4" />} onClick={() => setInviting(true)}>
            Invite someone
          </Button>
        )}
        {!onPeople && role !== null && role !== 'reader' && (
          <ButtonLink to={`/new?group=${slug}`} look="first" icon={<Plus aria-hidden className="size-4" />}>
            New model
          </ButtonLink>
        )}
      </SectionBar>
      {onPeople ? <GroupPeople group={group.data} /> : <GroupModels group={group.data} />}
      <GroupInvite group={group.data} open={inviting} onClose={() => setInviting(false)} />
    </main>
  )
}
