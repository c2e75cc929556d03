import { z } from 'zod'
import { errorCodes } from './errors.ts'

/** A draft (DraftContent) as it comes from another thread or process. */
export const draftContent = z.object({
  equations: z.string(),
  parameters: z.array(
    z.object({
      id: z.string(),
      symbol: z.string(),
      value: z.string(),
      low: z.string(),
      high: z.string(),
      unit: z.string(),
      meaning: z.string(),
      uncertainty: z.string().optional(),
    }),
  ),
  states: z.array(
    z.object({
      id: z.string(),
      symbol: z.string(),
      low: z.string(),
      high: z.string(),
      start: z.string(),
      unit: z.string(),
      meaning: z.string(),
    }),
  ),
  settings: z.record(z.string(), z.string()),
})

/** A fault of a model (ModelError) as it comes from another thread or process. */
export const modelError = z.object({
  code: z.enum(errorCodes),
  message: z.string(),
  line: z.number().optional(),
  column: z.number().optional(),
  length: z.number().optional(),
  path: z.string().optional(),
  cures: z.array(z.object({ label: z.string(), replacement: z.string() })).optional(),
})
