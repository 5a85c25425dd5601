/**
 * A figure as a page of vectors, its text still text. Dates are fixed, so that equal figures have equal bytes. The fonts
 * are the standard ones that every reader of PDF has: letters outside western European alphabets lose their marks or
 * become ?, and the SVG has them all.
 */
import { winAnsi } from './winAnsi.js'

const margin = 24
const fixedDate = new Date(0)

/** One page as large as the figure and a margin. The libraries are loaded when first needed. */
export async function pdfOf(svg: string): Promise<Uint8Array> {
  const [{ default: Document }, { default: draw }] = await Promise.all([import('pdfkit'), import('svg-to-pdfkit')])
  const [width, height] = ['width', 'height'].map((name) =>
    Number(new RegExp(`<svg[^>]* ${name}="([\\d.]+)"`).exec(svg)?.[1]),
  )
  const [title, alt] = ['title', 'desc'].map((name) => plain(new RegExp(`<${name}[^>]*>([^<]*)<`).exec(svg)?.[1] ?? ''))
  const page = new Document({
    size: [width + 2 * margin, height + 2 * margin],
    margin: 0,
    info: { Title: title, Subject: alt, CreationDate: fixedDate, ModDate: fixedDate },
    displayTitle: true,
    lang: 'en',
    tagged: true,
    pdfVersion: '1.7',
  })
  const parts: Uint8Array[] = []
  page.on('data', (part: Uint8Array) => parts.push(part))
  const finished = new Promise((resolve, reject) => page.on('end', resolve).on('error', reject))
  const figure = page.struct('Figure', { title, alt }, () => {
    // its types ask for the class where it takes a document
    draw(page as never, winAnsi(svg), margin, margin, { width, height, assumePt: true })
  })
  const whole = page.struct('Document', {}, [figure])
  page.addStructure(whole)
  page.end()
  await finished
  return Buffer.concat(parts)
}

/** Text of an element, its entities undone. */
function plain(text: string): string {
  return text
    .replace(/&lt;/g, '<')
    .replace(/&gt;/g, '>')
    .replace(/&quot;/g, '"')
    .replace(/&#39;/g, "'")
    .replace(/&amp;/g, '&')
}
