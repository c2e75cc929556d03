import { useRef, useState } from 'react'
import { ApiProblem } from '#src/api/api-problem.ts'
import { type NewSources, useAddSources } from '#src/api/sources.ts'
import { Button } from '#src/components/button.tsx'
import { FaultText, Field, TextField } from '#src/components/field.tsx'
import { Segments } from '#src/components/segments.tsx'
import { Select } from '#src/components/select.tsx'
import { newIdempotencyKey } from '#src/lib/idempotency-key.ts'

type Form = Extract<NewSources, { from: 'form' }>

const types: { value: Form['type']; label: string }[] = [
  { value: 'article-journal', label: 'Journal article' },
  { value: 'book', label: 'Book' },
  { value: 'chapter', label: 'Chapter' },
  { value: 'paper-conference', label: 'Conference paper' },
  { value: 'report', label: 'Report' },
  { value: 'standard', label: 'Standard' },
  { value: 'thesis', label: 'Thesis' },
  { value: 'dataset', label: 'Data set' },
  { value: 'webpage', label: 'Web page' },
  { value: 'document', label: 'Other document' },
]

const emptyForm = {
  type: 'article-journal' as Form['type'],
  title: '',
  authors: '',
  year: '',
  container: '',
  publisher: '',
  volume: '',
  issue: '',
  pages: '',
  doi: '',
  url: '',
}

/** Authors one a line, "Family, Given" or "Family". */
export function readAuthors(text: string): { family: string; given?: string }[] {
  return text
    .split('\n')
    .map((line) => line.trim())
    .filter((line) => line !== '')
    .map((line) => {
      const comma = line.indexOf(',')
      if (comma < 0) return { family: line }
      const given = line.slice(comma + 1).trim()
      return { family: line.slice(0, comma).trim(), ...(given ? { given } : {}) }
    })
}

function bodyOf(form: typeof emptyForm): Form {
  const filled = Object.fromEntries(
    Object.entries(form)
      .filter(([key]) => key !== 'authors' && key !== 'type' && key !== 'title')
      .map(([key, value]) => [key, value.trim()] as const)
      .filter(([, value]) => value !== ''),
  )
  return { from: 'form', type: form.type, title: form.title, authors: readAuthors(form.authors), ...filled }
}

/** Adds a source by form, or several by pasting BibTeX or CSL-JSON. What is typed stays until it is taken. */
export function AddSource({ code, onAdded }: { code: string; onAdded: (count: number) => void }) {
  const [way, setWay] = useState<'form' | 'pasted'>('form')
  const [form, setForm] = useState(emptyForm)
  const [pasted, setPasted] = useState('')
  const key = useRef(newIdempotencyKey())
  const add = useAddSources(code)
  const problem = add.error instanceof ApiProblem ? add.error : null
  const set = (part: Partial<typeof emptyForm>) => setForm((current) => ({ ...current, ...part }))
  const submit = () => {
    const body: NewSources = way === 'form' ? bodyOf(form) : { from: 'pasted', pasted }
    add.mutate(
      { body, key: key.current },
      {
        onSuccess: (answer) => {
          setForm(emptyForm)
          setPasted('')
          onAdded(answer.sources.length)
        },
        onSettled: () => {
          key.current = newIdempotencyKey()
        },
      },
    )
  }
  const field = (name: Exclude<keyof typeof emptyForm, 'type' | 'authors'>, label: string, hint?: string) => (
    <Field
      label={label}
      hint={hint}
      value={form[name]}
      error={problem?.of(name)}
      onChange={(event) => set({ [name]: event.target.value })}
    />
  )
  return (
    <form
      className="grid gap-3"
      onSubmit={(event) => {
        event.preventDefault()
        submit()
      }}
    >
      <Segments
        label="How to add a source"
        value={way}
        onChange={setWay}
        options={[
          { value: 'form', label: 'By form' },
          { value: 'pasted', label: 'Paste BibTeX or CSL-JSON' },
        ]}
      />
      {way === 'pasted' ? (
        <TextField
          label="BibTeX or CSL-JSON, one or more entries"
          rows={9}
          figures
          value={pasted}
          onChange={(event) => setPasted(event.target.value)}
        />
      ) : (
        <>
          <Select
            label="Kind"
            options={types}
            value={form.type}
            onChange={(event) =>
              set({ type: types.find((type) => type.value === event.target.value)?.value ?? 'document' })
            }
          />
          {field('title', 'Title')}
          <TextField
            label="Authors"
            hint="One a line: Family, Given"
            rows={2}
            value={form.authors}
            onChange={(event) => set({ authors: event.target.value })}
          />
          <div className="grid gap-3 tablet:grid-cols-2">
            {field('year', 'Year')}
            {field('container', 'Journal, book or series')}
            {field('publisher', 'Publisher or institution')}
            {field('volume', 'Volume')}
            {field('issue', 'Issue or number')}
            {field('pages', 'Pages')}
            {field('doi', 'DOI', '10.1234/abc')}
            {field('url', 'Address')}
          </div>
        </>
      )}
      {add.error && (
        <div role="alert" className="grid gap-1">
          <FaultText>{add.error.message}</FaultText>
          {(problem?.errors ?? []).map((fault) => (
            <p key={`${fault.path}-${fault.message}`} className="pl-6 text-note">
              {fault.line ? `Line ${fault.line}: ` : ''}
              {fault.message}
            </p>
          ))}
        </div>
      )}
      <div>
        <Button
          type="submit"
          look="first"
          pending={add.isPending}
          unavailable={
            (way === 'form' ? form.title.trim() === '' : pasted.trim() === '') &&
            (way === 'form' ? 'Give it a title.' : 'Paste an entry.')
          }
        >
          Add source
        </Button>
      </div>
    </form>
  )
}
