export interface RunningMariadb {
  port: number
  socket: string
  pid: number
  /** May read and write rows. */
  url: string
  /** May change tables. */
  migrateUrl: string
  stop(): Promise<void>
}
export function findProgram(name: string): string | null
export function ensurePrograms(programs: Record<string, string>, say: (line: string) => void): Promise<void>
export function dataDirectory(cloneRoot: string, given?: string): string
export function startMariadb(options: {
  directory: string
  say?: (line: string) => void
  throwaway?: boolean
  stopWithParent?: boolean
}): Promise<RunningMariadb>
export function startThrowawayMariadb(): Promise<RunningMariadb>
