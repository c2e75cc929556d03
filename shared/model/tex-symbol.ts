import { greekLetters } from './characters.ts'

// Capitals that look Latin have no command of their own in TeX.
const commandOf = (name: string) =>
  /^(?:Gamma|Delta|Theta|Lambda|Xi|Pi|Sigma|Upsilon|Phi|Psi|Omega)$|^[a-z]/.test(name) ? name : null
const spelled: ReadonlyMap<string, string> = new Map(
  [...new Set(greekLetters.values())].map((name) => {
    const command = commandOf(name)
    if (name === 'omicron') return [name, 'o'] as const
    if (name === 'epsilon') return [name, '\\varepsilon'] as const
    return [name, command === null ? `\\mathrm{${capital(name)}}` : `\\${command}`] as const
  }),
)

// The Latin capital that prints like the Greek one.
function capital(name: string): string {
  const twins: Record<string, string> = { Eta: 'H', Rho: 'P', Chi: 'X', Upsilon: 'Y' }
  return twins[name] ?? name.charAt(0)
}

/**
 * A symbol in TeX: Greek letters as such, letters of one word upright together in italic, digits and what follows an
 * underscore as subscript: omega0 and ω₀ are \omega_{0}, gNa is \mathit{gNa}, x_ref is x_{\mathrm{ref}}.
 * `dotted` sets a dot over it, for a rate. Takes valid symbols only; every character of the result is ASCII or a Latin letter inside \text.
 */
export function symbolTex(symbol: string, dotted = false): string {
  const plain = symbol.normalize('NFKC')
  const match = /^([^_]*?)([0-9]*)((?:_.*)?)$/su.exec(plain)
  const head = match?.[1] ?? plain
  const digits = match?.[2] ?? ''
  const tail = (match?.[3] ?? '').split('_').filter((part) => part !== '')
  // Digits inside the word (a1b) stay in it.
  const below = [digits, ...tail].filter((part) => part !== '').map(subscriptTex)
  const base = dotted ? `\\dot{${wordTex(head)}}` : wordTex(head)
  return below.length > 0 ? `${base}_{${below.join(',')}}` : base
}

function subscriptTex(part: string): string {
  if (/^[0-9]+$/.test(part)) return part
  const greek = spelled.get(part) ?? spelled.get(greekLetters.get(part) ?? '')
  if (greek) return greek
  return /^[A-Za-z]$/.test(part) ? part : upright(part)
}

function wordTex(word: string): string {
  const greek = spelled.get(word)
  if (greek) return greek
  let tex = ''
  let latin = ''
  const flush = () => {
    if (latin !== '')
      tex += /^[A-Za-z]$/.test(latin) ? latin : /^[A-Za-z0-9]+$/.test(latin) ? `\\mathit{${latin}}` : `\\text{${latin}}`
    latin = ''
  }
  for (const character of word) {
    const name = greekLetters.get(character)
    if (name === undefined) latin += character
    else {
      flush()
      tex += `${tex === '' ? '' : ' '}${spelled.get(name) ?? ''} `
    }
  }
  flush()
  return tex.trim()
}

const upright = (text: string) => {
  let tex = ''
  for (const character of text)
    tex += greekLetters.has(character) ? `}${spelled.get(greekLetters.get(character) ?? '') ?? ''}\\text{` : character
  return /^[A-Za-z0-9]+$/.test(text) ? `\\mathrm{${text}}` : `\\text{${tex}}`.replaceAll('\\text{}', '')
}
