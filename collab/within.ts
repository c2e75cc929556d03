/** Work that was not done in time; it goes on, but nobody waits for it any more. */
export class Late extends Error {
  override readonly name = 'Late'
}

/**
 * The result of work that has to be there in time.
 *
 * @param time In milliseconds.
 * @throws {Late} where it is not; the work's own error where it failed before.
 */
export async function within<T>(time: number, work: Promise<T>): Promise<T> {
  let timer: NodeJS.Timeout | undefined
  const late = new Promise<never>((_, reject) => {
    timer = setTimeout(() => reject(new Late(`No answer within ${time} ms.`)), time)
  })
  try {
    return await Promise.race([work, late])
  } finally {
    clearTimeout(timer)
  }
}
