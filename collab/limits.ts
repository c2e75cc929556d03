const second = 1000
const kibi = 1024

/**
 * Every limit and time-out of the co-editing server in one place; the tests read it and may hand attachCollab a changed
 * copy. Times are in milliseconds, sizes in bytes unless a comment says otherwise.
 */
export const collabLimits = {
  socket: {
    /** One message; a larger one closes the socket with 1009. */
    payload: 256 * kibi,
    /** Fragments of one message. */
    fragments: 64,
    /** Close handshake, after which the connection is cut. */
    close: 2 * second,
    /** Not yet sent to a reader that does not keep up; more of it cuts the connection. */
    unsent: 4 * kibi * kibi,
    /** A ping, and message 100 so that the browser's provider hears something (it gives up after 30 s of silence). */
    heartbeat: 15 * second,
  },
  handshake: {
    /** Handshakes begun within one second; more are answered 503 with Retry-After. */
    perSecond: 50,
    /** Looking the session and the page up; after that 503. */
    lookUp: 5 * second,
  },
  sockets: { perPersonAndRoom: 5, perPerson: 20, total: 2000 },
  rate: {
    /** Frames: `burst` at once, then `perSecond`. Over that the socket is read more slowly, it is not closed. */
    frames: { perSecond: 60, burst: 200 },
    bytes: { perSecond: 64 * kibi, burst: 512 * kibi },
    /** What one full state costs in frames, because its answer may be large. */
    syncStep1Frames: 10,
    /** Frames waiting while the room loads or the rate is exceeded; more of them close the socket with 4429. */
    waitingFrames: 1000,
    waitingBytes: 512 * kibi,
    /** A socket that is over its rate for so long is closed with 4429. */
    patience: 10 * second,
  },
  /** Frames that cannot be read, or that the sender may not send, before the socket is closed (1007, 4403). */
  strikes: 3,
  /** After a change of rights or state, frames already on their way are dropped without a strike for so long. */
  grace: 2 * second,
  presence: {
    /** One state as JSON, in UTF-16 units. */
    state: 1 * kibi,
    /** States passed on for one socket in a second; of more only the newest is passed on. */
    perSecond: 10,
  },
  document: {
    /** The equation block in UTF-8 bytes: the same limit as the model's own (shared/model/equations.ts). */
    text: 64 * kibi,
    /** A cell of a table, a setting (notes are settings) and a row's id, in UTF-16 units. */
    cell: 2000,
    setting: 20_000,
    rowId: 64,
    /** The encoded document. Within `stateMargin` of it there is no room for more edits. */
    state: 2 * kibi * kibi,
    stateMargin: 64 * kibi,
    /** Length of one deleted stretch, in clock steps. */
    deletedLength: 1_000_000,
  },
  broadcast: {
    /** The first update goes out at once; those that follow within this time go out together. */
    merge: 10,
  },
  append: {
    /** Edits wait at most so long for others to be committed with them. */
    wait: 20,
    rows: 64,
    bytes: 1024 * kibi,
    /** Pauses before the second, third and fourth try; after the last one the room is not saving. */
    retries: [100, 400, 1600],
    /** Then it is tried again this often. */
    retryEvery: 5 * second,
    /** A batch that is not committed by then: the room is not saving until it is. */
    slow: 5 * second,
  },
  compaction: { rows: 500, bytes: 256 * kibi },
  room: {
    /** A room without sockets is forgotten after so long. */
    idle: 60 * second,
    /** After a failed load the next one is not tried sooner. */
    loadPause: 2 * second,
    /** A socket whose edits were held back is asked for all of them at most this often. */
    askAgain: 1 * second,
  },
  recheck: {
    /** Session, role and page of each socket are looked up again. */
    every: 30 * second,
    /** Events about one page within this time cause one look-up. */
    gather: 50,
    /** Frames count as activity of the session, told at most this often. */
    activity: 60 * second,
  },
  shutdown: {
    /** Writing what is queued; after that the rest stays with the browsers, unacknowledged. */
    flush: 6 * second,
  },
}
export type CollabLimits = typeof collabLimits
