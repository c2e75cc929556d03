/**
 * Length of a text in UTF-8 bytes. A lone surrogate counts 3, as the replacement character that encoders write for it.
 */
export function utf8Length(text: string): number {
  let bytes = text.length
  for (let i = 0; i < text.length; i++) {
    const unit = text.charCodeAt(i)
    if (unit >= 0x800) {
      // A surrogate pair is two units and four bytes: one more byte for each unit.
      const high = unit >= 0xd800 && unit <= 0xdbff
      const next = high ? text.charCodeAt(i + 1) : 0
      if (next >= 0xdc00 && next <= 0xdfff) {
        bytes += 2
        i += 1
      } else bytes += 2
    } else if (unit >= 0x80) bytes += 1
  }
  return bytes
}

/** UTF-8 bytes of a text (RFC 3629). A lone surrogate is written as U+FFFD, as the Encoding standard does. */
export function utf8Bytes(text: string): Uint8Array {
  const bytes = new Uint8Array(utf8Length(text))
  let at = 0
  for (const character of text) {
    let code = character.codePointAt(0) ?? 0
    if (code >= 0xd800 && code <= 0xdfff) code = 0xfffd
    if (code < 0x80) bytes[at++] = code
    else if (code < 0x800) {
      bytes[at++] = 0xc0 | (code >> 6)
      bytes[at++] = 0x80 | (code & 0x3f)
    } else if (code < 0x10000) {
      bytes[at++] = 0xe0 | (code >> 12)
      bytes[at++] = 0x80 | ((code >> 6) & 0x3f)
      bytes[at++] = 0x80 | (code & 0x3f)
    } else {
      bytes[at++] = 0xf0 | (code >> 18)
      bytes[at++] = 0x80 | ((code >> 12) & 0x3f)
      bytes[at++] = 0x80 | ((code >> 6) & 0x3f)
      bytes[at++] = 0x80 | (code & 0x3f)
    }
  }
  return bytes
}
