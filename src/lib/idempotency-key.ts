/** A fresh key for one act of the user: sent again with it, the act is done once. `crypto.randomUUID` is absent on plain http. */
export function newIdempotencyKey(): string {
  return Array.from(crypto.getRandomValues(new Uint8Array(16)), (byte) => byte.toString(16).padStart(2, '0')).join('')
}
