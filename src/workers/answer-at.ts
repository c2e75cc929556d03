import { compileModel } from '#shared/model/compile.ts'
import type { ModelDocument } from '#shared/model/document.ts'
import { buildSystem } from '#shared/model/system.ts'
import { createBudget } from '#shared/stability/budget.ts'
import { listSteadyStates } from '#shared/stability/card-lists.ts'
import { createFrame } from '#shared/stability/frame.ts'
import { findSteadyStates } from '#shared/stability/steady-states.ts'
import { sameSymbol } from '#shared/stability/summary.ts'
import type { WorkerReply } from './messages.ts'

/** Evaluations of F and its Jacobian: for one value of the control far more than any list needs. */
const allowance = 100_000

/** Answers with the steady states of a checked model at the control value `p`, its other values as they stand. */
export function answerAt(id: number, document: ModelDocument, p: number, post: (reply: WorkerReply) => void): void {
  const parameters = document.parameters.map((row) =>
    sameSymbol(row.symbol, document.control) ? { ...row, value: p } : row,
  )
  const built = buildSystem({ ...document, parameters })
  if (!built.ok) {
    post({ kind: 'failed', id, message: built.errors[0]?.message ?? 'The model cannot be computed here.' })
    return
  }
  const frame = createFrame(compileModel(built.system), createBudget(allowance))
  const found = findSteadyStates(frame.model, frame.parameters)
  const steadyStates = listSteadyStates(frame, found).map(({ card }) => card)
  post({ kind: 'at', id, p, steadyStates, complete: found.complete })
}
