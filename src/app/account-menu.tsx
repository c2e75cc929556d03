import { useNavigate } from 'react-router-dom'
import type { Me } from '#shared/api/session.ts'
import { useSignOut } from '#src/api/session.ts'
import { InitialsRing } from '#src/components/initials-ring.tsx'
import { Menu, MenuAct, MenuLink, MenuNote, MenuRule } from '#src/components/menu.tsx'
import type { Place } from '#src/components/top-bar.tsx'
import { announce } from '#src/lib/announce.ts'

const trigger =
  'inline-flex min-h-11 min-w-11 items-center justify-center gap-2 rounded-control px-1 font-[620] hover:bg-pencil-tint bench:min-h-8 bench:min-w-8'

/** Own matters behind the initials; on a narrow window also the places, behind the word "Menu". */
export function AccountMenu({ me, places, onKeys }: { me: Me | null; places: readonly Place[]; onKeys: () => void }) {
  const navigate = useNavigate()
  const signOut = useSignOut()
  const leave = () =>
    signOut.mutate(undefined, {
      onSuccess: () => {
        announce('Signed out')
        navigate('/sign-in')
      },
    })
  return (
    <Menu
      label="Places and account"
      trigger={
        <button type="button" className={trigger} aria-label={me ? `Menu of ${me.name}` : 'Menu'}>
          <span className="bench:hidden">Menu</span>
          {me && (
            <span className="hidden bench:block">
              <InitialsRing name={me.name} own />
            </span>
          )}
          {!me && <span className="hidden bench:block">Menu</span>}
        </button>
      }
    >
      {me && (
        <MenuNote>
          <strong className="block text-ink">{me.name}</strong>
          {me.email}
        </MenuNote>
      )}
      <div className="bench:hidden">
        {places.map((place) => (
          <MenuLink key={place.to} to={place.to}>
            {place.label}
            {place.count !== undefined && place.count > 0 && (
              <span className="text-label text-ink-2">{place.count}</span>
            )}
          </MenuLink>
        ))}
      </div>
      <MenuRule />
      {me?.administrator && <MenuLink to="/admin/people">Administration</MenuLink>}
      {me && <MenuLink to="/preferences">Preferences</MenuLink>}
      <MenuAct onSelect={onKeys}>Keys</MenuAct>
      {me ? <MenuAct onSelect={leave}>Sign out</MenuAct> : <MenuLink to="/sign-in">Sign in</MenuLink>}
    </Menu>
  )
}
