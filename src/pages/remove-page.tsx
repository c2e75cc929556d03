import { useState } from 'react'
import { useNavigate } from 'react-router-dom'
import type { Page } from '#shared/api/pages.ts'
import { actWords } from '#src/api/act-words.ts'
import { useRemovePage } from '#src/api/pages.ts'
import { ActFault } from '#src/components/act-fault.tsx'
import { Button } from '#src/components/button.tsx'
import { Dialog } from '#src/components/dialog.tsx'
import { announce } from '#src/lib/announce.ts'

/** A page that never had a revision sent can be removed by a maintainer; it asks first. Nothing where it cannot be. */
export function RemovePage({ page }: { page: Page }) {
  const [asking, setAsking] = useState(false)
  const navigate = useNavigate()
  const remove = useRemovePage(page.code)
  if (!page.may.includes('page:remove')) return null
  const fault = remove.error && actWords(remove.error, 'The page is still there.')
  return (
    <>
      <Button look="quiet" onClick={() => setAsking(true)}>
        Remove this page
      </Button>
      <Dialog title={`Remove ${page.code}`} open={asking} onClose={() => setAsking(false)}>
        <p>
          <b>{page.title}</b> and its draft can be read and found by nobody afterwards. The code {page.code} is not used
          again.
        </p>
        {fault && <ActFault headline={fault.headline} text={fault.text} />}
        <div className="flex flex-wrap gap-2">
          <Button
            look="first"
            pending={remove.isPending}
            onClick={() =>
              remove.mutateAsync({ etag: page.etag }).then(
                () => {
                  announce(`Removed: ${page.code}`)
                  navigate('/')
                },
                // The refusal stands in the mutation's own error, from where it is shown.
                () => {},
              )
            }
          >
            Remove
          </Button>
          <Button look="quiet" onClick={() => setAsking(false)}>
            Keep it
          </Button>
        </div>
      </Dialog>
    </>
  )
}
