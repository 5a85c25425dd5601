/** Every generated file of the example studies, by its path under boundaries/. */
import { hedgerowFiles } from './hedgerows/farms.js'
import { quillhavenFiles } from './quillhaven/leases.js'

export function exampleFiles(): Record<string, string> {
  return { ...quillhavenFiles(), ...hedgerowFiles() }
}
