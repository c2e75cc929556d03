export const stripStates = [
  'draft',
  'in-review',
  'returned',
  'in-force',
  'superseded',
  'withdrawn',
  'on-hold',
  'practice',
] as const
export type StripState = (typeof stripStates)[number]

export const stateWord: Record<StripState, string> = {
  draft: 'Draft',
  'in-review': 'In review',
  returned: 'Returned',
  'in-force': 'In force',
  superseded: 'Superseded',
  withdrawn: 'Withdrawn',
  'on-hold': 'On hold',
  practice: 'Practice',
}

const cells = 'M1.8 1.8H22.2V10.2H1.8zM8.6 1.8V10.2M15.4 1.8V10.2'

function Shape({ state }: { state: StripState }) {
  const outline = <path d={cells} fill="none" stroke="currentColor" strokeWidth="1.6" />
  switch (state) {
    case 'draft':
      return outline
    case 'in-review':
      return (
        <>
          {outline}
          <path d="M1.8 1.8H8.6V10.2H1.8z" fill="currentColor" />
        </>
      )
    case 'in-force':
      return <path d="M1 1H7.7V11H1zM8.7 1H15.3V11H8.7zM16.3 1H23V11H16.3z" fill="currentColor" />
    case 'returned':
      return (
        <>
          <path d="M1 1H7.7V11H1z" fill="currentColor" />
          <path d="M23 6H11.5M15.4 1.9L11.1 6L15.4 10.1" fill="none" stroke="currentColor" strokeWidth="1.9" />
        </>
      )
    case 'superseded':
      return (
        <>
          {outline}
          <path d="M4.5 12L19.5 0" stroke="var(--color-sheet)" strokeWidth="4.5" />
          <path d="M3.5 12.8L20.5 -.8" stroke="currentColor" strokeWidth="2" />
        </>
      )
    case 'withdrawn':
      return (
        <>
          <path d="M4 1.8H20V10.2H4z" fill="none" stroke="currentColor" strokeWidth="1.6" />
          <path d="M0 6H24" stroke="currentColor" strokeWidth="2.8" />
        </>
      )
    case 'on-hold':
      return (
        <>
          {outline}
          <path d="M10.4 0V12M13.6 0V12" stroke="currentColor" strokeWidth="1.8" />
        </>
      )
    case 'practice':
      return (
        <path d="M1.8 1.8H22.2V10.2H1.8z" fill="none" stroke="currentColor" strokeWidth="1.6" strokeDasharray="3 2.2" />
      )
  }
}

/** State of a revision as the signature strip of a drawing: written | checked | approved. `named` where no word stands beside it. */
export function SignatureStrip({ state, named = false }: { state: StripState; named?: boolean }) {
  return (
    <svg
      viewBox="0 0 24 12"
      width="22"
      height="11"
      role="img"
      aria-label={stateWord[state]}
      aria-hidden={!named}
      className="shrink-0 overflow-visible"
    >
      <Shape state={state} />
    </svg>
  )
}

/** Strip and word together. */
export function StateWord({ state }: { state: StripState }) {
  return (
    <span className="inline-flex items-center gap-2 whitespace-nowrap">
      <SignatureStrip state={state} />
      {stateWord[state]}
    </span>
  )
}
