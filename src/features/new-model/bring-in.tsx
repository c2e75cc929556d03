import { FileInput } from 'lucide-react'
import { type DragEvent, type FormEvent, useRef, useState } from 'react'
import { ApiProblem } from '#src/api/api-problem.ts'
import { Button } from '#src/components/button.tsx'
import { FaultText, Field, TextField } from '#src/components/field.tsx'
import { largestFile, readModelText } from '#src/lib/model-file.ts'
import type { WayProps } from './write-equations.tsx'

/** The second way: a model document as a file or pasted. Everything that cannot be read is listed before anything is kept. */
export function BringIn(props: WayProps & { onStart: (body: { title: string; document: unknown }) => void }) {
  const { pending, error, onStart } = props
  const [text, setText] = useState('')
  const [fileName, setFileName] = useState<string | null>(null)
  const [title, setTitle] = useState<string | null>(null)
  const [fault, setFault] = useState<string | null>(null)
  const input = useRef<HTMLInputElement>(null)

  const take = (next: string, name: string | null) => {
    setText(next)
    setFileName(name)
    const read = readModelText(next)
    setFault(read.ok || next.trim() === '' ? null : read.message)
    setTitle(read.ok ? read.title : null)
  }
  const takeFile = async (file: File | undefined) => {
    if (!file) return
    if (file.size > largestFile) setFault('Larger than 250 KiB, which is more than the library takes.')
    else take(await file.text(), file.name)
  }
  const drop = (event: DragEvent) => {
    event.preventDefault()
    void takeFile(event.dataTransfer.files[0])
  }
  const submit = (event: FormEvent) => {
    event.preventDefault()
    const read = readModelText(text)
    if (!read.ok) return setFault(read.message)
    if (title === null || title.trim() === '') return setFault('Give it a name.')
    setFault(null)
    onStart({ title: title.trim(), document: read.document })
  }
  return (
    // Dropping is an extra for the pointer; the button and the field do the same for everybody.
    // biome-ignore lint/a11y/noStaticElementInteractions: see above
    <section
      className="sheet grid content-start gap-4 p-5"
      onDragOver={(event) => event.preventDefault()}
      onDrop={drop}
    >
      <div className="grid place-items-center gap-2 rounded-control border border-dashed border-line bg-well px-4 py-3 text-ink-2">
        <FileInput aria-hidden className="size-7" strokeWidth={1.5} />
        {fileName ?? 'drop a document here'}
      </div>
      <div>
        <h2 className="text-subtitle">Bring in a document</h2>
        <p className="text-ink-2">A model document as JSON. You see what cannot be read before it is kept.</p>
      </div>
      <form onSubmit={submit} noValidate className="grid gap-3">
        <input
          ref={input}
          type="file"
          accept=".json,application/json"
          aria-label="Model document, file"
          className="sr-only"
          tabIndex={-1}
          onChange={(event) => {
            void takeFile(event.target.files?.[0])
            event.target.value = ''
          }}
        />
        <Button onClick={() => input.current?.click()} className="justify-self-start">
          Choose a file
        </Button>
        <TextField
          label="Or paste it"
          figures
          rows={5}
          spellCheck={false}
          value={text}
          error={fault}
          onChange={(event) => take(event.target.value, null)}
        />
        {title !== null && <Field label="Name" value={title} onChange={(event) => setTitle(event.target.value)} />}
        {error && <Refusal error={error} />}
        <Button
          type="submit"
          look={text === '' ? 'plain' : 'first'}
          pending={pending}
          className="mt-1 justify-self-start"
        >
          Bring it in
        </Button>
      </form>
    </section>
  )
}

/** All faults of a refused document, each with its place. */
function Refusal({ error }: { error: Error }) {
  const errors = error instanceof ApiProblem ? error.errors : []
  return (
    <div role="alert" className="grid gap-2 border-l-3 border-fault pl-3">
      <FaultText>{error.message}</FaultText>
      {errors.length > 0 && (
        <ul className="grid gap-1.5">
          {errors.map((fault) => (
            <li key={`${fault.path ?? ''}:${fault.line ?? 0}:${fault.column ?? 0}:${fault.code}`} className="text-note">
              <span className="figures mr-2 text-label text-ink-2">{placeOf(fault)}</span>
              {fault.message}
            </li>
          ))}
        </ul>
      )}
    </div>
  )
}

function placeOf(fault: { path?: string; line?: number; column?: number }): string {
  if (fault.line !== undefined) return `line ${fault.line}${fault.column === undefined ? '' : `:${fault.column}`}`
  return fault.path ?? 'document'
}
