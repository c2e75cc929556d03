import type { StabilityCard } from '#shared/model/card-document.ts'
import { compileModel } from '#shared/model/compile.ts'
import { checkDraft, type DraftContent } from '#shared/model/draft.ts'
import type { ModelSystem } from '#shared/model/expression.ts'
import { blockToTex } from '#shared/model/tex.ts'
import { analyse } from '#shared/stability/card.ts'
import type { CardReply, WorkerReply } from './messages.ts'

/** Answers one draft: what its text says first, then its card. Pure but for `post`, so that it is tested without a worker. */
export function answerDraft(id: number, draft: DraftContent, post: (reply: WorkerReply) => void): void {
  const checked = checkDraft(draft)
  const lines = blockToTex(draft).map(({ line, kind, tex, text }) => ({ line, kind, tex, text }))
  post({
    kind: 'checked',
    id,
    document: checked.ok ? checked.document : null,
    errors: checked.ok ? [] : checked.errors,
    warnings: checked.ok ? checked.warnings : [],
    lines,
    helpers: lines.flatMap(({ kind, text }) => (kind === 'helper' ? (/^\s*([^\s=]+)\s*=/.exec(text)?.[1] ?? []) : [])),
  })
  if (!checked.ok) return
  const { document, system } = checked
  const postCard = (card: StabilityCard, complete: boolean) =>
    post({ kind: 'card', id, document, card, complete, helperValues: valuesOf(system, card) })
  const result = analyse(document, {
    parts: ['steady', 'hopf'],
    onProgress: (stage, share) => post({ kind: 'progress', id, stage, share }),
    onCard: (card) => postCard(card, false),
  })
  if (result.ok) postCard(result.card, true)
  else post({ kind: 'failed', id, message: result.errors[0]?.message ?? 'The analysis ended without an answer.' })
}

/** The helpers at the first stable steady state of the page's value, else at the first one. */
function valuesOf(system: ModelSystem, card: StabilityCard): CardReply['helperValues'] {
  const found = card.steadyStates?.find((state) => state.stable) ?? card.steadyStates?.[0]
  if (!found || system.helpers.length === 0) return []
  const x = Float64Array.from(system.states, ({ symbol }) => found.state[symbol] ?? Number.NaN)
  const p = Float64Array.from(system.parameters, ({ value }) => value)
  const out = new Float64Array(system.helpers.length)
  compileModel(system).helpers(x, p, out)
  return system.helpers.flatMap(({ line }, i) => {
    const value = out[i]
    return value === undefined || !Number.isFinite(value) ? [] : [{ line, value }]
  })
}
