/** Text in the letters of the standard fonts of PDF (Windows code page 1252). */

const beyondLatin1 = '€‚ƒ„…†‡ˆ‰Š‹ŒŽ‘’“”•–—˜™š›œžŸ'

/** Signs that have a stand-in. */
const standIns: Readonly<Record<string, string>> = {
  '−': '–',
  '≤': '&lt;=',
  '≥': '&gt;=',
  τ: 'tau',
  ł: 'l',
  Ł: 'L',
  đ: 'd',
  Đ: 'D',
  ı: 'i',
}

const isKnown = (character: string) => character <= '\u00ff' || beyondLatin1.includes(character)

/** Of SVG or other markup: letters that the fonts lack lose their marks; what is left of those becomes a question mark. */
export function winAnsi(markup: string): string {
  return Array.from(markup, (character) => {
    if (isKnown(character)) return character
    const standIn = standIns[character]
    if (standIn !== undefined) return standIn
    const bare = Array.from(character.normalize('NFKD')).filter((part) => !/\p{M}/u.test(part))
    return bare.length > 0 && bare.every((part) => part <= '\u00ff') ? bare.join('') : '?'
  }).join('')
}
