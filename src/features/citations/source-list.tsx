import { X } from 'lucide-react'
import type { FormattedSource, SourceLink } from '#shared/api/sources.ts'

export interface SourceListProps {
  sources: readonly FormattedSource[]
  /** Absent: read only. */
  onRemove?: (source: FormattedSource) => void
  onUnlink?: (link: SourceLink) => void
  renderActs?: (source: FormattedSource) => React.ReactNode
}

const labelWords: Record<string, string> = {
  page: 'page',
  equation: 'equation',
  table: 'table',
  figure: 'figure',
  section: 'section',
  chapter: 'chapter',
}

/** What a link points at, in words: "value of mu, table 3: 0.42". */
export function linkText(link: SourceLink): string {
  const target =
    link.target.kind === 'page'
      ? 'the page as a whole'
      : link.target.kind === 'parameter'
        ? link.target.symbol
        : `line ${link.target.line}`
  const place = link.locator ? `, ${link.label ? `${labelWords[link.label] ?? link.label} ` : ''}${link.locator}` : ''
  return `${target}${place}${link.quoted ? `: ${link.quoted}` : ''}`
}

/** The page's sources, numbered as they are cited, each with what it stands behind. */
export function SourceList({ sources, onRemove, onUnlink, renderActs }: SourceListProps) {
  if (sources.length === 0)
    return <p className="text-ink-2">No source yet. A number without a source is a number nobody can check.</p>
  return (
    <ol className="grid">
      {sources.map((source, index) => (
        <li
          key={source.id}
          id={`source-${index + 1}`}
          className="grid grid-cols-[1.75rem_1fr_auto] gap-x-2 border-b border-rule py-3 last:border-b-0"
        >
          <span className="figures text-note text-ink-2">{index + 1}</span>
          <div className="min-w-0">
            <p className="wrap-anywhere">{source.formatted}</p>
            {(source.doi || source.url) && (
              <p className="text-note wrap-anywhere">
                <a
                  className="link"
                  href={source.doi ? `https://doi.org/${source.doi}` : (source.url ?? undefined)}
                  rel="noreferrer noopener"
                  target="_blank"
                >
                  {source.doi ? `doi:${source.doi}` : source.url}
                </a>
              </p>
            )}
            <ul className="mt-1 flex flex-wrap gap-x-4 gap-y-1 text-note text-ink-2">
              {source.links.map((link) => (
                <li key={link.id} className="inline-flex items-center gap-1">
                  {linkText(link)}
                  {onUnlink && link.target.kind !== 'page' && (
                    <button
                      type="button"
                      aria-label={`Detach from ${linkText(link)}`}
                      onClick={() => onUnlink(link)}
                      className="inline-grid size-6 place-items-center rounded-control hover:bg-pencil-tint max-bench:size-11"
                    >
                      <X aria-hidden className="size-3.5" />
                    </button>
                  )}
                </li>
              ))}
            </ul>
            {renderActs?.(source)}
          </div>
          {onRemove && (
            <button
              type="button"
              aria-label={`Remove ${source.title}`}
              onClick={() => onRemove(source)}
              className="inline-grid size-7 place-items-center rounded-control text-ink-3 hover:bg-pencil-tint hover:text-ink max-bench:size-11"
            >
              <X aria-hidden className="size-4" />
            </button>
          )}
        </li>
      ))}
    </ol>
  )
}
