import { useQuery } from '@tanstack/react-query'
import { reviewsQuery } from '#src/api/reviews.ts'
import { useViewer } from '#src/api/session.ts'
import { Waiting } from '#src/components/pencil-line.tsx'
import { ReviewList } from '#src/features/reviews/review-list.tsx'
import { ReadFault } from './page-gate.tsx'

/** To check, sent by me, settled. */
export function ReviewsPage() {
  const reviews = useQuery(reviewsQuery(useViewer()))
  if (reviews.isPending) return <Waiting what="Reading the reviews" />
  if (reviews.isError) return <ReadFault error={reviews.error} what="reviews" onAgain={() => reviews.refetch()} />
  const { toCheck, sentByMe, settled } = reviews.data
  return (
    <main className="mx-auto grid w-full grid-cols-1 max-w-[1120px] content-start gap-4 px-6 py-5 max-tablet:px-4">
      <title>Reviews · Brinkbook</title>
      <h1 className="text-title">Reviews</h1>
      <ReviewList
        title="To check"
        rows={toCheck}
        empty="Nothing waits for you. A revision lands here when a group you maintain sends one."
      />
      <ReviewList title="Sent by me" rows={sentByMe} empty="You have no revision under review." />
      <ReviewList title="Settled" rows={settled} empty="Nothing settled yet." />
    </main>
  )
}
