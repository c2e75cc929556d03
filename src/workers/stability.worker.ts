import '#src/lib/no-eval.ts'
import { answerDraft } from './answer-draft.ts'
import type { DraftRequest, WorkerReply } from './messages.ts'
import { warmUpDraft } from './warm-up.ts'

const post = (reply: WorkerReply) => self.postMessage(reply)

// The first card of a cold worker takes ten times as long; a small model is run before anybody waits.
answerDraft(0, warmUpDraft, () => undefined)
post({ kind: 'ready' })

self.onmessage = ({ data }: MessageEvent<DraftRequest>) => {
  try {
    answerDraft(data.id, data.draft, post)
  } catch (error) {
    post({
      kind: 'failed',
      id: data.id,
      message: error instanceof Error ? error.message : 'The analysis ended without an answer.',
    })
  }
}
