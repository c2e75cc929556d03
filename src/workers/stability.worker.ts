import '#src/lib/no-eval.ts'
import { answerAt } from './answer-at.ts'
import { answerDraft } from './answer-draft.ts'
import { readRequest, type WorkerReply } from './messages.ts'
import { warmUpDraft } from './warm-up.ts'

const post = (reply: WorkerReply) => self.postMessage(reply)

// The first card of a cold worker takes ten times as long; a small model is run before anybody waits.
answerDraft(0, warmUpDraft, () => undefined)
post({ kind: 'ready' })

self.onmessage = ({ data }: MessageEvent<unknown>) => {
  const request = readRequest(data)
  if (!request) return
  try {
    if (request.kind === 'draft') answerDraft(request.id, request.draft, post)
    else answerAt(request.id, request.document, request.p, post)
  } catch (error) {
    const message = error instanceof Error ? error.message : 'it ended without an answer'
    post({ kind: 'failed', id: request.id, message: `The calculation met a fault of its own: ${message}` })
  }
}
