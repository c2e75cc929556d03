import { kindHue, kindTitle } from '#src/lib/kind-words.ts'

export const glyphKinds = ['hard', 'soft', 'undecided', 'none', 'split'] as const
export type GlyphKind = (typeof glyphKinds)[number]

const hue: Record<GlyphKind, string> = { ...kindHue, split: 'text-ink' }

function Shape({ kind }: { kind: GlyphKind }) {
  switch (kind) {
    case 'hard':
      return (
        <>
          <path d="M1 4H16V9H9V18.6H23V22H1z" />
          <circle cx="19.2" cy="14" r="3.3" />
        </>
      )
    case 'soft':
      return (
        <>
          <path d="M1 4H6.5L16 18.6H23V22H1z" />
          <circle cx="14.6" cy="9" r="3.3" />
        </>
      )
    case 'undecided':
      return (
        <>
          <path d="M1 10H11.5V22H1z" />
          <circle cx="11.5" cy="5.6" r="3.3" />
          <path d="M14 11.4h3.4M19.6 11.4h3.4M14 20.6h3.4M19.6 20.6h3.4" stroke="currentColor" strokeWidth="2.4" />
        </>
      )
    case 'none':
      return (
        <>
          <path d="M1 5H23V10H1z" />
          <path d="M7.5 10 1.5 20.5M14 10 8 20.5M20.5 10 14.5 20.5" stroke="currentColor" strokeWidth="2.4" />
        </>
      )
    case 'split':
      return (
        <>
          <path className="fill-hard" d="M1 4H13V8.4H8V12H1z" />
          <path className="fill-soft" d="M1 13.4H8.6L14 18.6H23V22H1z" />
          <circle cx="18.6" cy="6.6" r="3.1" fill="none" stroke="currentColor" strokeWidth="2" />
        </>
      )
  }
}

/** The kind of an onset as a picture: ground, edge and the floor one lands on. It always stands beside its word, so it has no name of its own. */
export function OnsetGlyph({ kind, size = 20, faded = false }: { kind: GlyphKind; size?: number; faded?: boolean }) {
  return (
    <svg
      viewBox="0 0 24 24"
      width={size}
      height={size}
      fill="currentColor"
      aria-hidden
      className={`shrink-0 ${faded ? 'text-ink-3' : hue[kind]}`}
    >
      <Shape kind={kind} />
    </svg>
  )
}

const title: Record<GlyphKind, string> = { ...kindTitle, split: 'Hard or soft' }

/** Glyph and word together, in the hue of the kind. `word` where the kind's own does not say it all. */
export function OnsetWord({ kind, size = 20, word }: { kind: GlyphKind; size?: number; word?: string }) {
  return (
    <span className="inline-flex items-center gap-2">
      <OnsetGlyph kind={kind} size={size} />
      <span className={`font-[620] ${kind === 'none' ? 'text-ink-2' : hue[kind]}`}>{word ?? title[kind]}</span>
    </span>
  )
}
