/** Bytes and doubles as base64 text (RFC 4648, section 4): exact, and a third the length of digits. */

const alphabet = 'ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz0123456789+/'

export function base64(bytes: Uint8Array): string {
  let text = ''
  for (let index = 0; index < bytes.length; index += 3) {
    const group = (bytes[index] << 16) | ((bytes[index + 1] ?? 0) << 8) | (bytes[index + 2] ?? 0)
    const known = Math.min(3, bytes.length - index) + 1
    for (let digit = 0; digit < 4; digit++) text += digit < known ? alphabet[(group >> (18 - 6 * digit)) & 63] : '='
  }
  return text
}

/** Doubles of eight bytes each, the lowest first; NaN is kept. */
export function base64OfNumbers(values: Float64Array): string {
  const view = new DataView(new ArrayBuffer(8 * values.length))
  for (let i = 0; i < values.length; i++) view.setFloat64(8 * i, values[i], true)
  return base64(new Uint8Array(view.buffer))
}

/** The doubles of such a text. Throws RangeError on a character that base64 has not. */
export function numbersOfBase64(text: string): Float64Array {
  const length = text.replace(/=+$/, '').length
  const view = new DataView(new ArrayBuffer(Math.floor((length * 3) / 4)))
  let bits = 0
  let filled = 0
  let at = 0
  for (let i = 0; i < length; i++) {
    const digit = alphabet.indexOf(text[i])
    if (digit < 0) throw new RangeError(`${JSON.stringify(text[i])} is no digit of base64`)
    bits = (bits << 6) | digit
    filled += 6
    if (filled < 8) continue
    filled -= 8
    view.setUint8(at++, (bits >> filled) & 255)
    bits &= (1 << filled) - 1
  }
  return Float64Array.from({ length: Math.floor(at / 8) }, (_, i) => view.getFloat64(8 * i, true))
}
