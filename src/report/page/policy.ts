/** The page's content security policy: nothing may load or run, and one style sheet applies, named by its SHA-256. */
import { sha256 } from '@noble/hashes/sha2.js'
import { utf8ToBytes } from '@noble/hashes/utils.js'

export function contentPolicy(style: string): string {
  const hash = base64(sha256(utf8ToBytes(style)))
  return `default-src 'none'; style-src 'sha256-${hash}'; img-src data:; base-uri 'none'; form-action 'none'`
}

const alphabet = 'ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz0123456789+/'

function base64(bytes: Uint8Array): string {
  let text = ''
  for (let index = 0; index < bytes.length; index += 3) {
    const group = (bytes[index] << 16) | ((bytes[index + 1] ?? 0) << 8) | (bytes[index + 2] ?? 0)
    const digits = [18, 12, 6, 0].map((shift) => alphabet[(group >> shift) & 63])
    const known = Math.min(3, bytes.length - index) + 1
    text += digits.slice(0, known).join('').padEnd(4, '=')
  }
  return text
}
