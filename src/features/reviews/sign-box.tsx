import type { RevisionHead } from '#shared/api/pages.ts'
import { useApproveRevision, useReturnRevision } from '#src/api/revisions.ts'
import { usePhone } from '#src/hooks/use-media.ts'
import { ApproveForm } from './approve-form.tsx'
import { RefusedAct } from './refused-act.tsx'
import { RemarkForm, type RemarkTargets } from './remark-form.tsx'
import { toSend, written } from './remarks.ts'
import type { Remarks } from './use-remarks.ts'

export interface SignBoxProps {
  code: string
  revision: RevisionHead
  /** Why this viewer cannot approve; null where they can. */
  whyNot: string | null
  mayReturn: boolean
  targets: RemarkTargets
  remarks: Remarks
  onSettled: (what: 'Approved' | 'Returned with remarks') => void
}

// A refusal stands in the mutation's own error, from where it is shown.
const shown = () => {}

/**
 * Where a revision is settled: returned with remarks, or, on a screen that shows it in full, approved with the password. A
 * phone says at its foot why not there (phone-foot.tsx).
 */
export function SignBox({ code, revision, whyNot, mayReturn, targets, remarks, onSettled }: SignBoxProps) {
  const phone = usePhone()
  const approve = useApproveRevision(code, revision.mark)
  const giveBack = useReturnRevision(code, revision.mark)
  const { etag } = revision
  // Promises, not the callbacks of mutate: what was settled is read again first, and this box is gone by then.
  if (phone && !mayReturn) return null
  return (
    <section aria-label="Settle this review" className="sheet grid content-start gap-5 p-4">
      {mayReturn && (
        <RemarkForm
          remarks={remarks}
          targets={targets}
          pending={giveBack.isPending}
          fault={<RefusedAct error={giveBack.error} code={code} notDone="Nothing is returned." />}
          onReturn={() =>
            giveBack.mutateAsync({ etag, remarks: toSend(remarks.all) }).then(() => {
              remarks.clear()
              onSettled('Returned with remarks')
            }, shown)
          }
        />
      )}
      {!phone && (
        <ApproveForm
          whyNot={whyNot}
          openRemarks={written(remarks.all).length}
          pending={approve.isPending}
          fault={<RefusedAct error={approve.error} code={code} notDone="Nothing is signed." />}
          onApprove={(password, settled) =>
            approve
              .mutateAsync({ password, etag })
              .then(() => onSettled('Approved'), shown)
              .finally(settled)
          }
        />
      )}
    </section>
  )
}
