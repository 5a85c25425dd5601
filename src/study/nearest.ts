import { distance } from 'fastest-levenshtein'

/**
 * The word a person most likely meant: the one of fewest edits, if they are few for its length and no other is as near.
 * Case and the choice of hyphen, underscore or space do not count.
 */
export function nearest(written: string, words: readonly string[]): string | undefined {
  const plain = (word: string) => word.toLowerCase().replace(/[-_ ]/g, '')
  const length = plain(written).length
  const edits = words.map((word) => distance(plain(written), plain(word)))
  const fewest = Math.min(...edits)
  const near = words.filter((_, at) => edits[at] === fewest)
  return near.length === 1 && fewest <= (length < 4 ? 1 : Math.ceil(length / 3)) ? near[0] : undefined
}
