import { type ReactNode, useState } from 'react'
import { useNavigate } from 'react-router-dom'
import { useMe, useSignOutEverywhere } from '#src/api/session.ts'
import { Button } from '#src/components/button.tsx'
import { Check } from '#src/components/check.tsx'
import { Dialog } from '#src/components/dialog.tsx'
import { FaultText } from '#src/components/field.tsx'
import { Segments } from '#src/components/segments.tsx'
import { PasswordChange } from '#src/features/session/password-change.tsx'
import { announce } from '#src/lib/announce.ts'
import { setSingleKeys, singleKeysOn } from '#src/lib/single-keys.ts'
import { type Appearance, appearance, setAppearance } from '#src/lib/theme.ts'

const appearanceOptions = [
  { value: 'machine', label: 'as the machine' },
  { value: 'light', label: 'light' },
  { value: 'dark', label: 'dark' },
] as const

/** Kept on change, in this browser; the password apart. */
export function PreferencesPage() {
  const me = useMe()
  const [look, setLook] = useState<Appearance>(appearance)
  const [keysOn, setKeysOn] = useState(singleKeysOn)
  const [kept, setKept] = useState<'look' | 'keys' | null>(null)
  const [changing, setChanging] = useState(false)
  const keep = (what: 'look' | 'keys') => {
    setKept(what)
    announce('Kept')
  }
  return (
    <main className="grid grid-cols-[minmax(0,1fr)] content-start gap-4 px-4 py-4 tablet:px-6">
      <title>Preferences · Brinkbook</title>
      <h1 className="text-title">Preferences</h1>
      <div className="grid items-start gap-4 bench:grid-cols-2">
        <Sheet title="Reading">
          <Setting name="Appearance" note="In this browser.">
            <Segments
              label="Appearance"
              options={appearanceOptions}
              value={look}
              onChange={(choice) => {
                setAppearance(choice)
                setLook(choice)
                keep('look')
              }}
            />
            <Kept shown={kept === 'look'} />
          </Setting>
        </Sheet>
        <Sheet title="Keys">
          <Setting
            name="Single keys"
            note="/ find; 0 then 1 to 3 places; numbers for sections of a page; ? lists them all"
          >
            <Check
              checked={keysOn}
              onChange={(event) => {
                setSingleKeys(event.target.checked)
                setKeysOn(event.target.checked)
                keep('keys')
              }}
            >
              on while not typing
            </Check>
            <Kept shown={kept === 'keys'} />
          </Setting>
        </Sheet>
        <Sheet title="Name and password">
          <Setting name="Shown as" note="The name under signatures.">
            {me?.name}
          </Setting>
          <Setting name="E-mail" note="You sign in with it.">
            <span className="wrap-anywhere">{me?.email}</span>
          </Setting>
          <Setting name="Password">
            <Button onClick={() => setChanging(true)}>Change password</Button>
          </Setting>
          <Setting name="Signed in" note="Ends every session of yours, on this machine too.">
            <SignOutEverywhere />
          </Setting>
        </Sheet>
      </div>
      <Dialog title="Change password" open={changing} onClose={() => setChanging(false)}>
        <PasswordChange onDone={() => setChanging(false)} />
      </Dialog>
    </main>
  )
}

function Sheet({ title, children }: { title: string; children: ReactNode }) {
  return (
    <section className="sheet">
      <h2 className="px-4 py-3 font-[680]">{title}</h2>
      {children}
    </section>
  )
}

function Setting({ name, note, children }: { name: string; note?: string; children: ReactNode }) {
  return (
    <div className="grid items-center gap-2 border-t border-rule px-4 py-3 tablet:grid-cols-[220px_minmax(0,1fr)]">
      <div>
        <p className="font-[560]">{name}</p>
        {note && <p className="text-note text-ink-2">{note}</p>}
      </div>
      <div className="flex flex-wrap items-center gap-3">{children}</div>
    </div>
  )
}

const Kept = ({ shown }: { shown: boolean }) => (shown ? <span className="text-note text-ink-2">Kept</span> : null)

function SignOutEverywhere() {
  const navigate = useNavigate()
  const signOut = useSignOutEverywhere()
  return (
    <>
      <Button
        pending={signOut.isPending}
        onClick={() =>
          signOut.mutate(undefined, {
            onSuccess: () => {
              announce('Signed out everywhere')
              navigate('/sign-in')
            },
          })
        }
      >
        Sign out everywhere
      </Button>
      {signOut.isError && <FaultText>{signOut.error.message}</FaultText>}
    </>
  )
}
