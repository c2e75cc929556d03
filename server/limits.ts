const second = 1000
const minute = 60 * second
const hour = 60 * minute
const day = 24 * hour

const compute = {
  /** Child processes for cards, kept warm. */
  children: 2,
  /** One card; then the child is killed. */
  cardDeadline: 10 * second,
  citationDeadline: 10 * second,
  /** Cards that may wait for a child. */
  waiting: 100,
  /** A draft's card is computed once it has not changed for so long, and at the latest after `latest`. */
  settle: 2 * second,
  latest: 15 * second,
}

/**
 * Every limit and time-out of the server in one place; the tests read it. Times are in milliseconds, sizes in bytes.
 * Tests may widen a limit by handing createApp a changed copy.
 */
export const limits = {
  http: {
    bodyBytes: 256 * 1024,
    /** Nesting of a JSON body. */
    bodyDepth: 64,
    headersTimeout: 10 * second,
    requestTimeout: 30 * second,
    keepAliveTimeout: 65 * second,
    headersCount: 64,
    connections: 2000,
  },
  session: {
    idle: 60 * minute,
    absolute: 12 * hour,
    /** The time a person was last seen is written at most this often. */
    touch: 60 * second,
    /** Expired rows of the session table are deleted this often. */
    sweep: 15 * minute,
  },
  links: { setup: 7 * day, invitation: 14 * day, password: 1 * day },
  password: {
    /** argon2id: memory in KiB, passes, lanes. */
    memory: 19_456,
    passes: 2,
    lanes: 1,
    /** Hashes computed at once; more of them wait. */
    atOnce: 2,
    waiting: 64,
  },
  rate: {
    window: minute,
    /** Requests of one person, or of one address where nobody is signed in. */
    api: 300,
    /** Refused sign-ins (and refused passwords of a signed-in person). */
    signInByAccount: 5,
    signInByAddress: 20,
    /** Pasted texts read for one person in `importsWindow`: each may hold many sources and occupies a child process. */
    imports: 60,
    importsWindow: hour,
    /** Cards computed for one person on request. */
    cards: 30,
    cardsAtOnce: 2,
  },
  compute,
  /** While the demonstration library is loaded nobody waits for an answer, and a slow machine has to get there too. */
  loading: { ...compute, cardDeadline: minute },
  idempotencyKeys: { keep: 1 * day },
  /** `unsaved`: edits that wait longer for the database make the process unready; `diskFree`: less of the disk free does, as a share. */
  ready: { ping: 1 * second, unsaved: 5 * second, diskFree: 0.1 },
  /** From the first SIGTERM to the end. */
  shutdown: { drain: 10 * second },
}
export type Limits = typeof limits
