/** The nonce of this page's policy, for libraries that add style sheets of their own; empty in development. */
export function cspNonce(): string {
  const content = document.querySelector<HTMLMetaElement>('meta[name="csp-nonce"]')?.content ?? ''
  return content.startsWith('%') ? '' : content
}
