const greek = new Map(
  (
    'alpha α beta β gamma γ delta δ epsilon ε zeta ζ eta η theta θ iota ι kappa κ lambda λ mu μ nu ν xi ξ rho ρ sigma σ ' +
    'tau τ upsilon υ phi φ chi χ psi ψ omega ω Gamma Γ Delta Δ Theta Θ Lambda Λ Xi Ξ Pi Π Sigma Σ Phi Φ Psi Ψ Omega Ω'
  )
    .split(' ')
    .flatMap((name, index, all) => (index % 2 === 0 ? [[name, all[index + 1] ?? name] as const] : [])),
)

/**
 * A symbol as it is set in the mathematical italic, by the same rules as typeset equations (shared/model/tex-symbol.ts):
 * spelled-out Greek as its letter, digits at the end and what follows `_` below.
 */
export function symbolParts(symbol: string): { base: string; sub: string | null } {
  const plain = symbol.normalize('NFKC')
  const match = /^([^_]*?)([0-9]*)((?:_.*)?)$/su.exec(plain)
  const head = match?.[1] ?? plain
  const below = [match?.[2] ?? '', ...(match?.[3] ?? '').split('_')].filter((part) => part !== '')
  const base = greek.get(head) ?? head
  return { base, sub: below.length === 0 ? null : below.map((part) => greek.get(part) ?? part).join(',') }
}
