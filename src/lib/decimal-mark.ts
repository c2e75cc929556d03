/**
 * The decimal mark of a language, of the two the product writes: a point where the language has another one, or none is
 * known of.
 */
export function decimalMarkOf(language: string | undefined): '.' | ',' {
  if (!language) return '.'
  try {
    const parts = new Intl.NumberFormat(language).formatToParts(1.5)
    return parts.find((part) => part.type === 'decimal')?.value === ',' ? ',' : '.'
  } catch {
    // The browser names a language that Intl does not take.
    return '.'
  }
}

/**
 * The reader's decimal mark, by the browser's language. For what is read on screens: fields, what is copied and files
 * have the ASCII point.
 */
export const decimalMark: '.' | ',' = decimalMarkOf(typeof navigator === 'undefined' ? undefined : navigator.language)

/** A number's text with the reader's mark. @param text  with at most one point, the decimal one. */
export const withDecimalMark = (text: string): string => text.replace('.', decimalMark)
