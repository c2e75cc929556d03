import { readdirSync, readFileSync } from 'node:fs'
import path from 'node:path'
import { z } from 'zod'
import { verdicts } from '#shared/model/card-document.ts'
import { modelDocument } from '#shared/model/document.ts'

/**
 * Reference cases: models from textbooks and papers, or constructed as traps, with what a correct analysis finds. The
 * figures were computed apart from this project, with symbolic derivatives at 40 digits, and checked a second way (planar
 * formula, small cycles by Fourier collocation). `source` names where the model comes from; `sourceNote` says where it
 * was written down from memory; `published` are numbers the source itself prints.
 */
const state = z.record(z.string(), z.number())
const tolerance = z.object({
  p: z.number().optional(),
  crossing: z.number().optional(),
  cubic: z.number().optional(),
  shift: z.number().optional(),
  firstLyapunov: z.number().optional(),
})

const referenceCase = z.object({
  source: z.string().min(1),
  sourceNote: z.string(),
  comment: z.string().optional(),
  published: z.array(z.record(z.string(), z.unknown())).optional(),
  model: modelDocument,
  expect: z.object({
    steadyStates: z.object({
      p: z.number(),
      list: z.array(z.object({ state, eigenvalues: z.array(z.tuple([z.number(), z.number()])), stable: z.boolean() })),
    }),
    hopf: z.array(
      z.object({
        p: z.number(),
        state,
        omega: z.number(),
        crossing: z.number(),
        firstLyapunov: z.number().nullable(),
        cubic: z.number().nullable(),
        shift: z.number().nullable(),
        verdict: z.enum(verdicts),
        operating: z.boolean(),
        atol: tolerance.default({}),
        otherEigenvalues: z.array(z.tuple([z.number(), z.number()])).optional(),
      }),
    ),
    folds: z.array(z.object({ p: z.number(), state: state.optional() })),
    branchPoints: z.array(z.object({ p: z.number(), state })),
  }),
})
export type ReferenceCase = z.infer<typeof referenceCase>

const folder = path.join(import.meta.dirname, 'cases')

/** All cases, by file name. */
export function referenceCases(): { name: string; reference: ReferenceCase }[] {
  return readdirSync(folder)
    .sort()
    .map((file) => ({
      name: file.replace('.json', ''),
      reference: referenceCase.parse(JSON.parse(readFileSync(path.join(folder, file), 'utf8'))),
    }))
}
