import katex from 'katex'
import 'katex/dist/katex.min.css'
import { useEffect, useRef, useState } from 'react'
import type { ShownLine } from '#shared/api/revisions.ts'

/** One typeset statement; as typed where it cannot be set. KaTeX draws into the node itself: no HTML text is handled here. */
export function Formula({ tex, text }: { tex: string | null; text: string }) {
  const host = useRef<HTMLSpanElement>(null)
  const [plain, setPlain] = useState(tex === null)
  useEffect(() => {
    const node = host.current
    if (!node || tex === null) {
      setPlain(true)
      return
    }
    try {
      katex.render(tex, node, {
        trust: false,
        strict: 'error',
        maxExpand: 100,
        maxSize: 20,
        displayMode: false,
        throwOnError: true,
      })
      setPlain(false)
    } catch {
      node.replaceChildren()
      setPlain(true)
    }
  }, [tex])
  return (
    <>
      <span ref={host} hidden={plain} />
      {plain && <code className="figures text-equation">{text}</code>}
    </>
  )
}

export interface EquationLinesProps {
  lines: readonly ShownLine[]
  /** What a line cites, by line: shown as small numbers that lead to the source below. */
  cited?: ReadonlyMap<number, { href: string; label: string }[]>
}

/** The equation block, typeset, comments as words. Wide equations scroll inside themselves. */
export function EquationLines({ lines, cited }: EquationLinesProps) {
  const numbers = new Map(lines.filter((line) => line.kind === 'equation').map((line, index) => [line.line, index + 1]))
  return (
    <ol className="grid gap-1.5" aria-label="Equations">
      {lines.map((line) => (
        <li key={line.line} className="flex items-baseline justify-between gap-3">
          {line.kind === 'comment' ? (
            <span className="text-note text-ink-2">{line.text.replace(/^\s*#\s?/, '')}</span>
          ) : (
            <span
              role="group"
              aria-label={line.text}
              tabIndex={0}
              className="min-w-0 overflow-x-auto py-0.5 text-[1rem]"
            >
              <Formula tex={line.tex} text={line.text} />
            </span>
          )}
          <span className="flex shrink-0 gap-1.5 text-label text-ink-2">
            {(cited?.get(line.line) ?? []).map((source) => (
              <a
                key={source.href}
                href={source.href}
                className="link inline-grid min-h-6 min-w-6 place-items-center"
                aria-label={`Source ${source.label} of line ${line.line}`}
              >
                {source.label}
              </a>
            ))}
            {numbers.has(line.line) && <span className="figures">({numbers.get(line.line)})</span>}
          </span>
        </li>
      ))}
    </ol>
  )
}
