/** The page's content security policy: nothing may load; one style sheet and one script apply, named by their SHA-256. */
import { sha256 } from '@noble/hashes/sha2.js'
import { utf8ToBytes } from '@noble/hashes/utils.js'
import { base64 } from '../../math/index.js'

export function contentPolicy(style: string, script?: string): string {
  const scripts = script === undefined ? '' : ` script-src ${hashOf(script)};`
  return `default-src 'none'; style-src ${hashOf(style)};${scripts} img-src data:; base-uri 'none'; form-action 'none'`
}

function hashOf(text: string): string {
  return `'sha256-${base64(sha256(utf8ToBytes(text)))}'`
}
