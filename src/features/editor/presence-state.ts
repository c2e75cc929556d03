import { z } from 'zod'
import { presenceUser } from '#shared/ydoc/rooms.ts'

const itemId = z.object({ client: z.number(), clock: z.number() })
/** A place in the text as Yjs writes it into JSON: beside an item, or at the end of a root of that name. */
const relativePosition = z.object({
  type: itemId.nullish(),
  tname: z.string().nullish(),
  item: itemId.nullish(),
  assoc: z.number().optional(),
})
export type RelativePosition = z.infer<typeof relativePosition>

/** `user` is the server's word, `cursor` another browser's: what is not of this shape is as good as absent. */
const presenceState = z.object({
  user: presenceUser.nullish().catch(null),
  cursor: z.object({ anchor: relativePosition, head: relativePosition }).nullish().catch(null),
})

/** What one presence state says of its tab. */
export const readPresence = (state: unknown): z.infer<typeof presenceState> => presenceState.safeParse(state).data ?? {}
