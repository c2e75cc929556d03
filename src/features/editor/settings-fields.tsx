import type * as Y from 'yjs'
import type { DraftContent } from '#shared/model/draft.ts'
import type { SettingKey } from '#shared/ydoc/shape.ts'
import { Field, TextField } from '#src/components/field.tsx'
import { Select } from '#src/components/select.tsx'
import { setSetting } from './draft-tables.ts'

export interface SettingsFieldsProps {
  doc: Y.Doc
  content: DraftContent
  readOnly: boolean
  /** Faults by path of the model document: "control". */
  faults: ReadonlyMap<string, string>
  /** Helper quantities by name: any of them may be observed. */
  helpers: readonly string[]
}

/** What the model is about: control, observed quantity, time unit and the words of the page. */
export function SettingsFields({ doc, content, readOnly, faults, helpers }: SettingsFieldsProps) {
  const { settings } = content
  const named = (rows: readonly { symbol: string; meaning: string }[]) =>
    rows
      .filter((row) => row.symbol !== '')
      .map((row) => ({ value: row.symbol, label: row.meaning ? `${row.symbol}, ${row.meaning}` : row.symbol }))
  const withCurrent = (options: { value: string; label: string }[], current: string, none: string) => [
    { value: '', label: none },
    ...options,
    ...(current !== '' && !options.some((option) => option.value === current)
      ? [{ value: current, label: `${current} (not declared)` }]
      : []),
  ]
  const field = (key: SettingKey, label: string, hint?: string) => (
    <Field
      data-place={key}
      label={label}
      hint={hint}
      value={settings[key] ?? ''}
      readOnly={readOnly}
      error={faults.get(key)}
      onChange={(event) => setSetting(doc, key, event.target.value)}
    />
  )
  const select = (key: SettingKey, label: string, options: { value: string; label: string }[]) => (
    <Select
      data-place={key}
      label={label}
      options={options}
      value={settings[key] ?? ''}
      disabled={readOnly}
      error={faults.get(key)}
      onChange={(event) => setSetting(doc, key, event.target.value)}
    />
  )
  const observable = [
    ...named(content.states),
    ...helpers.map((name) => ({ value: name, label: `${name}, helper quantity` })),
  ]
  return (
    <div className="grid gap-3">
      <div className="grid gap-3 tablet:grid-cols-2">
        {select(
          'control',
          'Control parameter',
          withCurrent(named(content.parameters), settings.control ?? '', 'Choose one'),
        )}
        {select(
          'secondControl',
          'Second control',
          withCurrent(named(content.parameters), settings.secondControl ?? '', 'None'),
        )}
        {select('observed', 'Observed quantity', withCurrent(observable, settings.observed ?? '', 'Choose one'))}
        {field('timeUnit', 'Time unit', 's, min, h or d')}
        {field('quietWord', 'Words for steady running', 'for instance: Runs straight')}
      </div>
      {field('title', 'Title of the page')}
      {field('summary', 'One or two sentences')}
      {field('field', 'Field')}
      <TextField
        data-place="leftOut"
        label="What the model leaves out"
        hint="One a line: which physics is neglected"
        rows={3}
        value={settings.leftOut ?? ''}
        error={faults.get('leftOut')}
        readOnly={readOnly}
        onChange={(event) => setSetting(doc, 'leftOut', event.target.value)}
      />
      <TextField
        data-place="notes"
        label="Notes"
        rows={3}
        value={settings.notes ?? ''}
        error={faults.get('notes')}
        readOnly={readOnly}
        onChange={(event) => setSetting(doc, 'notes', event.target.value)}
      />
    </div>
  )
}
