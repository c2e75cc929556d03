import { Lock } from 'lucide-react'
import { ButtonLink } from '#src/components/button.tsx'
import { StateSheet } from '#src/components/state-sheet.tsx'

/** 403 and 404 alike: whether a thing is missing or kept from the viewer is not told. `what`: "page TAR-14". */
export function NothingHere({ what }: { what?: string }) {
  return (
    <main className="grid flex-1 place-items-center p-6">
      <title>{`${what === undefined ? 'Nothing stands here' : `No ${what}`} · Brinkbook`}</title>
      <StateSheet
        level={1}
        picture={<Lock aria-hidden className="size-10" strokeWidth={1.5} />}
        title={what === undefined ? 'Nothing stands here' : 'Nothing here for you to read'}
        acts={<ButtonLink to="/">To the Library</ButtonLink>}
      >
        {what === undefined
          ? 'This address leads to no screen. If someone sent it to you, ask them for it again.'
          : `There is no ${what}, or it is kept for a group you are not in. Both answer the same. If someone sent you here, ask them which group keeps it.`}
      </StateSheet>
    </main>
  )
}

export function NothingHerePage() {
  return <NothingHere />
}
