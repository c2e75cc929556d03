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
export function startMariadb(options: {
  directory: string
  say?: (line: string) => void
  throwaway?: boolean
}): Promise<RunningMariadb>
export function startThrowawayMariadb(): Promise<RunningMariadb>
