import { describe, expect, it } from 'vitest'
import { csvField, escapeHtml, escapeLatex, escapeMarkdown, slugs } from '../../src/report/escape.js'
import { cell, fixed, p, pWords, sharedPlaces, significant, wholeNumber } from '../../src/report/numbers.js'

describe('numbers for readers', () => {
  it.each([
    [0, '0'],
    [1234.5678, '1,235'],
    [-1234567.8, '−1,234,568'],
    [999.95, '1,000'],
    [12.34567, '12.35'],
    [0.01234567, '0.01235'],
    [5, '5'],
    [0.00001234567, '1.235e-5'],
    [-3e15, '−3.000e+15'],
    [Number.NaN, '–'],
    [Number.POSITIVE_INFINITY, '–'],
    [null, '–'],
  ])('%s with four significant digits is %s', (value, text) => expect(significant(value)).toBe(text))

  it.each([
    [0, '<0.001'],
    [0.00099, '<0.001'],
    [0.001, '0.001'],
    [0.0124, '0.012'],
    [0.9996, '>0.999'],
    [1, '1.000'],
    [null, '–'],
  ])('p %s is %s', (value, text) => expect(p(value)).toBe(text))

  it('writes p in words', () => {
    expect(pWords(0.0124)).toBe('p = 0.012')
    expect(pWords(1e-9)).toBe('p < 0.001')
  })

  it('gives a column the places of three digits of its median standard error', () => {
    expect(sharedPlaces([0.0158, 0.0201, 4], [0.04])).toBe(4)
    expect(sharedPlaces([158], [1000])).toBe(0)
    expect(sharedPlaces([0, Number.NaN], [12.5])).toBe(2)
    expect(sharedPlaces([1e-12], [1])).toBe('scientific')
    expect(fixed(0.00000000123, 'scientific')).toBe('1.230e-9')
    expect(fixed(-0.00001, 3)).toBe('0.000')
    expect(fixed(-1234.5, 1)).toBe('−1,234.5')
  })

  it('withholds counts above zero and under the smallest cell', () => {
    expect([0, 1, 9, 10, 1234].map((units) => cell(units, 10))).toEqual(['0', '<10', '<10', '10', '1,234'])
  })

  it('prints a cutoff whole', () => {
    expect(wholeNumber(21000.125)).toBe('21,000.125')
    expect(wholeNumber(-0.1)).toBe('−0.1')
  })
})

describe('escaping', () => {
  const hostile = `<script>alert("x")</script> & 100% | 'a_b' $#~^{}\\ \`c\` *d*`

  it('leaves no tag, entity or quote open in HTML', () => {
    expect(escapeHtml(hostile)).not.toMatch(/[<>"']/)
    expect(escapeHtml('&amp;')).toBe('&amp;amp;')
    expect(escapeHtml('a\u0000b\u001fc')).toBe('a\ufffdb\ufffdc')
  })

  it('escapes every special character of LaTeX once', () => {
    expect(escapeLatex('50% of a_b & c\\d {e} $f #g ~h ^i <j> |k| "l" −3')).toBe(
      '50\\% of a\\_b \\& c\\textbackslash{}d \\{e\\} \\$f \\#g \\textasciitilde{}h \\textasciicircum{}i \\textless{}j\\textgreater{} \\textbar{}k\\textbar{} \\textquotedbl{}l\\textquotedbl{} $-$3',
    )
  })

  it('keeps a Markdown cell one cell of plain text', () => {
    const text = escapeMarkdown(`a|b\nc <b> *d* [e](f) \`g\``)
    expect(text).toBe('a\\|b c &lt;b&gt; \\*d\\* \\[e\\](f) \\`g\\`')
  })

  it('writes CSV fields that read back', () => {
    expect(csvField('a,"b"\nc')).toBe('"a,""b""\nc"')
    expect(Number(csvField(0.1 + 0.2))).toBe(0.1 + 0.2)
    expect([null, undefined, Number.NaN].map(csvField)).toEqual(['', '', ''])
  })
})

describe('file names', () => {
  it('are safe and never alike', () => {
    const names = slugs(['log rent', 'log/rent', 'LOG-RENT', '../../etc', 'Größe', '<script>', '…', '', 'a_b'])
    for (const name of names) expect(name).toMatch(/^[A-Za-z0-9_-]+$/)
    expect(new Set(names.map((name) => name.toLowerCase())).size).toBe(names.length)
    expect(names.slice(0, 3)).toEqual(['log-rent', 'log-rent-2', 'LOG-RENT-3'])
    expect(slugs(['x'.repeat(300)])[0].length).toBe(60)
  })
})
