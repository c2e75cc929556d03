declare module 'express-mysql-session' {
  import type session from 'express-session'
  import type { Store } from 'express-session'
  import type { Pool } from 'mysql2'

  interface Options {
    /** Milliseconds that a row without a cookie expiry lives. */
    expiration: number
    createDatabaseTable: boolean
    clearExpired: boolean
    checkExpirationInterval: number
    disableTouch: boolean
    endConnectionOnClose: boolean
  }
  export interface MySqlStore extends Store {
    close(): Promise<void>
  }
  export default function create(module: typeof session): new (options: Options, pool: Pool) => MySqlStore
}
