import type { IncomingMessage, Server } from 'node:http'
import { attachCollab, type CollabOptions } from '#collab/index.ts'
import type { App } from './app.ts'
import type { Dependencies } from './http/context.ts'
import { originAllowed } from './http/same-site.ts'
import { createDraftCards } from './services/draft-cards.ts'
import { loadPageAccess } from './services/page-context.ts'
import { isStanding, loadViewer, noteActivity } from './services/viewer.ts'

export interface Editing {
  /** Saves what was typed and closes every socket. */
  closeSockets(): Promise<void>
  /** Ends the work that follows edits. */
  close(): Promise<void>
}

/** Joins the co-editing sockets to the sessions, the policy, the events and the library's rows of drafts. */
export function attachEditing(
  server: Server,
  dependencies: Dependencies,
  { gate, readiness }: App,
  options: Pick<CollabOptions, 'limits'> = {},
): Editing {
  const { db, config, limits, events, compute, logger, now } = dependencies
  const { settle, latest } = limits.compute
  const draftCards = createDraftCards({
    db,
    compute,
    settle,
    latest,
    now,
    report: (error, pageId) => logger.error({ err: error, pageId }, 'the card of a draft was not computed'),
  })
  const collab = attachCollab(server, {
    ...options,
    db,
    now,
    log: logger,
    authenticate: async (request: IncomingMessage) => {
      const claim = await gate.claimOf(request)
      const { person } = await loadViewer(db, { claim, now: now(), times: limits.session })
      return claim && person ? { ...claim, name: person.name } : null
    },
    stillSignedIn: (claim) => isStanding(db, { claim, now: now(), times: limits.session }),
    access: ({ personId, epoch }, pageId) => loadPageAccess(db, { personId, epoch, pageId }),
    originAllowed: (request) => originAllowed(config, request),
    subscribe: (listener) =>
      events.subscribe((event) => {
        if (event.kind !== 'draft-changed') listener(event)
      }),
    // The bundler of the development server has a socket of its own.
    answerUnknown: config.mode !== 'development',
    noteActivity: ({ sessionHash }) => noteActivity(db, { sessionHash, now: now() }),
    draftSaved: draftCards.changed,
  })
  const unsubscribe = events.subscribe((event) => {
    if (event.kind === 'draft-changed') draftCards.changed(event.pageId)
  })
  readiness.checks.push(() => {
    const { notSaving, unsavedAge } = collab.stats()
    return notSaving === 0 && unsavedAge < limits.ready.unsaved
  })
  draftCards.catchUp().catch((error: unknown) => logger.error({ err: error }, 'drafts were not caught up'))
  return {
    closeSockets: collab.close,
    close: async () => {
      unsubscribe()
      await draftCards.close()
    },
  }
}
