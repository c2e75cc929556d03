const greek: Record<string, string> = {
  alpha: 'α',
  beta: 'β',
  gamma: 'γ',
  delta: 'δ',
  epsilon: 'ε',
  zeta: 'ζ',
  eta: 'η',
  theta: 'θ',
  iota: 'ι',
  kappa: 'κ',
  lambda: 'λ',
  mu: 'μ',
  nu: 'ν',
  xi: 'ξ',
  rho: 'ρ',
  sigma: 'σ',
  tau: 'τ',
  upsilon: 'υ',
  phi: 'φ',
  chi: 'χ',
  psi: 'ψ',
  omega: 'ω',
  Gamma: 'Γ',
  Delta: 'Δ',
  Theta: 'Θ',
  Lambda: 'Λ',
  Xi: 'Ξ',
  Pi: 'Π',
  Sigma: 'Σ',
  Upsilon: 'Υ',
  Phi: 'Φ',
  Psi: 'Ψ',
  Omega: 'Ω',
}

/** A symbol as it is set in the mathematical italic: spelled-out Greek as its letter, what follows `_` or a trailing number below. */
export function symbolParts(symbol: string): { base: string; sub: string | null } {
  const match = /^(.+?)(?:_(.+)|(\d+))?$/.exec(symbol)
  const base = match?.[1] ?? symbol
  const sub = match?.[2] ?? match?.[3] ?? null
  return { base: greek[base] ?? base, sub: sub === null ? null : (greek[sub] ?? sub) }
}
