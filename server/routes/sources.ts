import type { HandlerContext } from '#server/http/context.ts'
import { type Api, mount } from '#server/http/mount.ts'
import { fromForm, fromPasted } from '#server/services/source-input.ts'
import * as sources from '#server/services/sources.ts'
import { addSources, linkSource, listSources, removeSource, unlinkSource } from '#shared/api/sources.ts'

type Context = HandlerContext<unknown, unknown, unknown>

const actorOf = ({ person, now, requestId }: Context) => ({ personId: person.id, now, requestId })
const allOf = async ({ db, compute, page }: Context) => ({ sources: await sources.list(db, compute, page) })

export function sourceRoutes(api: Api): void {
  mount(api, listSources, allOf)

  mount(api, addSources, async (context) => {
    const { db, compute, page, body, events, person, limiter } = context
    if (body.from === 'pasted') limiter.take('imports', String(person.id))
    const found = body.from === 'pasted' ? await fromPasted(compute, body.pasted) : fromForm(body)
    await sources.add(db, page, { ...actorOf(context), sources: found })
    events.draftChanged(page.id)
    return allOf(context)
  })

  mount(api, removeSource, async (context) => {
    const { db, page, params, events } = context
    await sources.remove(db, page, { ...actorOf(context), sourceId: params.source })
    events.draftChanged(page.id)
  })

  mount(api, linkSource, async (context) => {
    const { db, page, params, body, events } = context
    await sources.link(db, page, { ...actorOf(context), ...body, sourceId: params.source })
    events.draftChanged(page.id)
    return allOf(context)
  })

  mount(api, unlinkSource, async (context) => {
    const { db, page, params, events } = context
    await sources.unlink(db, page, { ...actorOf(context), linkId: params.link })
    events.draftChanged(page.id)
  })
}
