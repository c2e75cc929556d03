import { zodResolver } from '@hookform/resolvers/zod'
import { useForm } from 'react-hook-form'
import { createPage } from '#shared/api/pages.ts'
import { Button } from '#src/components/button.tsx'
import { FaultText, Field, TextField } from '#src/components/field.tsx'

const fields = createPage.body.pick({ title: true, summary: true, field: true })
const emptyIsNone = { setValueAs: (value: unknown) => (value === '' ? undefined : value) }

export interface WayProps {
  pending: boolean
  error: Error | null
}

/** The first way: a name, then straight to the equations. */
export function WriteEquations(
  props: WayProps & { onStart: (body: { title: string; summary?: string; field?: string }) => void },
) {
  const { pending, error, onStart } = props
  const { register, handleSubmit, formState } = useForm({
    resolver: zodResolver(fields),
    defaultValues: { title: '', summary: undefined, field: undefined },
  })
  return (
    <section className="sheet grid content-start gap-4 p-5">
      <pre aria-hidden className="figures rounded-control border border-rule bg-well px-4 py-3 text-note leading-7">
        {'dx/dt = a*x - w*y\ndy/dt = ?'}
      </pre>
      <div>
        <h2 className="text-subtitle">Write equations</h2>
        <p className="text-ink-2">One line for each state. The card runs from the first line that closes.</p>
      </div>
      <form onSubmit={handleSubmit(onStart)} noValidate className="grid gap-3">
        <Field label="Name" error={formState.errors.title?.message ?? null} {...register('title')} />
        <TextField
          label="What loses its steady running (can be left empty)"
          rows={2}
          error={formState.errors.summary?.message ?? null}
          {...register('summary', emptyIsNone)}
        />
        <Field
          label="Field (can be left empty)"
          hint="Such as rail vehicles, combustion, power grids."
          error={formState.errors.field?.message ?? null}
          {...register('field', emptyIsNone)}
        />
        {error && (
          <div role="alert">
            <FaultText>{error.message}</FaultText>
          </div>
        )}
        <Button type="submit" look="first" pending={pending} className="mt-1 justify-self-start">
          Start writing
        </Button>
      </form>
    </section>
  )
}
