import { describe, expect, it } from 'vitest'
import { labelCoder } from '../../src/records/duckdb/labels.js'
import { labelsOf } from '../../src/records/index.js'
import { labels, numbers, testFolder, textsOf, valuesOf } from './room.js'

const room = testFolder()

/** Mulberry32: bits for test data, from a seed. */
function bits(seed: number): () => number {
  let state = seed
  return () => {
    state = (state + 0x6d2b79f5) | 0
    let t = Math.imul(state ^ (state >>> 15), 1 | state)
    t = (t + Math.imul(t ^ (t >>> 7), 61 | t)) ^ t
    return (t ^ (t >>> 14)) >>> 0
  }
}

/** Finite doubles of every size: random bits, a tenth of them subnormal. */
function randomDoubles(count: number): number[] {
  const next = bits(20)
  const words = new Uint32Array(2)
  const double = new Float64Array(words.buffer)
  const found: number[] = []
  while (found.length < count) {
    words[0] = next()
    words[1] = found.length % 10 === 0 ? next() & 0x800fffff : next()
    if (Number.isFinite(double[0])) found.push(double[0])
  }
  return found
}

describe('numbers', () => {
  const doubles = [
    ...randomDoubles(10_000),
    5e-324,
    Number('2.2250738585072011e-308'),
    1.7976931348623157e308,
    0,
    2 ** 53 + 2,
  ]
  const texts = doubles.flatMap((value) => [
    String(value),
    value.toExponential(20),
    value.toPrecision(17),
    value.toPrecision(5),
  ])

  it('are read bit by bit as Number reads them', async () => {
    const finite = texts.filter((text) => Number.isFinite(Number(text)))
    const content = `a,b\n${finite.map((text, i) => `${text},${i}`).join('\n')}\n`
    const read = valuesOf(await room.table('doubles.csv', content, { wanted: numbers('a') }), 'a')
    expect(finite.filter((text, i) => !Object.is(read[i], Number(text)))).toEqual([])
  })

  it('are read bit by bit from JSON lines', async () => {
    const content = doubles.map((value) => `{"a":${value}}`).join('\n')
    const read = valuesOf(await room.table('doubles.jsonl', content, { wanted: numbers('a') }), 'a')
    expect(doubles.filter((value, i) => read[i] !== value)).toEqual([])
  })
})

describe('many rows', () => {
  const count = 150_000
  const next = bits(7)
  const rows = Array.from({ length: count }, (_, i) => ({
    id: String((i * 7919) % count),
    zone: ['Ä', 'North Harbour District', 'south', '', '\u{1f6f6} quay', '\uffee quay'][next() % 6],
    x: (next() - 2 ** 31) / 1000,
  }))
  const content = `id,zone,x\n${rows.map(({ id, zone, x }) => `${id},${zone},${x}`).join('\n')}\n`

  it('stay in the order of the file, with labels sorted by code unit', async () => {
    const table = await room.table('many.csv', content, { wanted: [...numbers('x'), ...labels('id', 'zone')] })
    expect(table.rowsRead).toBe(count)
    expect(table.lineOfRow[count - 1]).toBe(count + 1)
    expect(valuesOf(table, 'x')).toEqual(rows.map(({ x }) => x))
    expect(textsOf(table, 'id')).toEqual(rows.map(({ id }) => id))
    expect(textsOf(table, 'zone')).toEqual(rows.map(({ zone }) => zone || null))
    expect(labelsOf(table, 'id').labels).toEqual([...new Set(rows.map(({ id }) => id))].sort())
    expect(labelsOf(table, 'zone').labels).toEqual([...new Set(rows.map(({ zone }) => zone))].filter(Boolean).sort())
  })

  it('keep their order and lines under a condition', async () => {
    const wanted = [...numbers('x'), ...labels('id')]
    const table = await room.table('many.csv', content, { wanted, keep: "x > 0 and zone = 'south'" })
    const kept = rows.map((row, i) => ({ ...row, line: i + 2 })).filter(({ x, zone }) => x > 0 && zone === 'south')
    expect(table.rowsRead).toBe(count)
    expect(table.rows).toBe(kept.length)
    expect([...table.lineOfRow]).toEqual(kept.map(({ line }) => line))
    expect(valuesOf(table, 'x')).toEqual(kept.map(({ x }) => x))
    expect(textsOf(table, 'id')).toEqual(kept.map(({ id }) => id))
  })

  it('name the line of one bad cell, one ragged row or one bad byte among them', async () => {
    const lines = content.split('\n')
    lines[120_000] = 'q,south,much'
    const problems = await room.problems('bad.csv', lines.join('\n'), { wanted: numbers('x') })
    expect(problems).toEqual([
      'bad.csv:120001: x (outcomes[0]): must be a number: "much"; write a number, or leave the cell empty',
    ])
    lines[120_000] = 'q,south'
    expect((await room.problems('bad.csv', lines.join('\n'), { wanted: numbers('x') }))[0]).toMatch(
      /^bad\.csv:120001: each row/,
    )
    lines[120_000] = 'q,caf\u00e9,1'
    const latin = Buffer.concat([
      Buffer.from(lines.slice(0, 120_000).join('\n')),
      Buffer.from(`\n${lines[120_000]}\n`, 'latin1'),
      Buffer.from(lines.slice(120_001).join('\n')),
    ])
    expect((await room.problems('bad.csv', latin, { wanted: numbers('x') }))[0]).toMatch(
      /^bad\.csv:120001: the text must be UTF-8/,
    )
  })

  it('may hold characters of several bytes anywhere', async () => {
    const text = '\u{1f6f6}é\uffee'.repeat(3000)
    for (const shift of ['', 'x', 'xy', 'xyz']) {
      const wide = `${shift}a,b\n${`${text},1\n`.repeat(100)}`
      const table = await room.table('wide.csv', wide, { wanted: [...numbers('b'), ...labels(`${shift}a`)] })
      expect(valuesOf(table, 'b')).toEqual(new Array(100).fill(1))
      expect(labelsOf(table, `${shift}a`).labels).toEqual([text])
    }
  })
})

describe('labels of numbers', () => {
  it('are their shortest texts, sorted by code unit', async () => {
    const table = await room.table('years.csv', 'year\n2015\n9\n\n2015\n0.5\n', { wanted: numbers('year') })
    expect(labelsOf(table, 'year')).toEqual({
      kind: 'label',
      name: 'year',
      codes: Int32Array.of(1, 2, -1, 1, 0),
      labels: ['0.5', '2015', '9'],
    })
  })
})

describe('the label coder', () => {
  /** Codes texts as DuckDB would hand them over; hashes are a weak one, so that long texts share buckets. */
  function coded(texts: readonly string[], rowsAtATime = texts.length) {
    const words = new Uint32Array(4 * texts.length)
    const bytes = Buffer.from(words.buffer)
    const hashes = new Uint32Array(2 * texts.length)
    texts.forEach((text, i) => {
      const length = Buffer.byteLength(text)
      words[4 * i] = length
      bytes.write(length > 12 ? text.slice(0, 4) : text, 16 * i + 4)
      hashes[2 * i] = [...text].reduce((sum, letter) => (Math.imul(sum, 31) + letter.codePointAt(0)!) | 0, 0)
    })
    const coder = labelCoder(16)
    for (let first = 0; first < texts.length; first += rowsAtATime) {
      const last = Math.min(first + rowsAtATime, texts.length)
      coder.add(
        words.subarray(4 * first, 4 * last),
        hashes.subarray(2 * first),
        last - first,
        undefined,
        (row) => texts[first + row],
      )
    }
    const { codes, labels: found } = coder.finish()
    expect(Array.from(codes, (code) => found[code] ?? '')).toEqual(texts)
    expect(found).toEqual([...new Set(texts)].filter((text) => text !== '').sort())
  }

  it('sorts many short ASCII labels as the language does', () => {
    const next = bits(3)
    const letters = ' !09AZaz~\u0001'
    coded(
      Array.from({ length: 40_000 }, () =>
        Array.from({ length: next() % 13 }, () => letters[next() % letters.length]).join(''),
      ),
    )
  })

  it('finds identifiers that come again after many that were new', () => {
    coded(
      Array.from({ length: 200_000 }, (_, i) => `L${String(i % 70_000).padStart(7, '0')}`),
      5000,
    )
    coded(
      Array.from({ length: 200_000 }, (_, i) => (i % 3 === 0 ? `a long identifier ${i % 90_000}` : `${i % 80_000}`)),
      5000,
    )
  })

  it('keeps texts apart that end in NUL', () => {
    coded([...Array.from({ length: 25_000 }, (_, i) => `${i}\0`), ...Array.from({ length: 25_000 }, (_, i) => `${i}`)])
  })

  it('sorts long and wide labels as the language does', () => {
    const next = bits(4)
    coded(
      Array.from({ length: 30_000 }, (_, i) =>
        `${['Ä', '\u{1f6f6}', '\uffee', 'b'][next() % 4]}${i % 7000} of a long name`.slice(0, 4 + (next() % 20)),
      ),
    )
  })
})
