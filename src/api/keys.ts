/**
 * Keys of what is kept of the server's data. All but the session's carry the viewer's number (0: nobody signed in), so
 * that nothing one person may read is ever shown to the next one at the same browser.
 */
export const keys = {
  session: ['session'] as const,
  links: ['links'] as const,
  library: (viewer: number) => ['viewer', viewer, 'library'] as const,
  groups: (viewer: number) => ['viewer', viewer, 'groups'] as const,
  group: (viewer: number, group: string) => ['viewer', viewer, 'groups', group] as const,
  people: (viewer: number) => ['viewer', viewer, 'people'] as const,
  reviews: (viewer: number) => ['viewer', viewer, 'reviews'] as const,
  /** Everything of one page: its head, draft, sources and revisions lie under it. */
  page: (viewer: number, code: string) => ['viewer', viewer, 'pages', code] as const,
  pageHead: (viewer: number, code: string) => ['viewer', viewer, 'pages', code, 'head'] as const,
  draft: (viewer: number, code: string) => ['viewer', viewer, 'pages', code, 'draft'] as const,
  sources: (viewer: number, code: string) => ['viewer', viewer, 'pages', code, 'sources'] as const,
  revisions: (viewer: number, code: string) => ['viewer', viewer, 'pages', code, 'revisions'] as const,
  revision: (viewer: number, code: string, mark: string, other: string | null) =>
    ['viewer', viewer, 'pages', code, 'revisions', mark, other] as const,
}
