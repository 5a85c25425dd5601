/** What the page re-estimates is what the program gives at that fixed bandwidth: an identity, so no outside value is needed. */
import { describe, expect, it } from 'vitest'
import { sumsOfSides, unitsWithin } from '../../src/analysis/whatIfSums.js'
import {
  buildSample,
  type Entries,
  fittedAt,
  type Inference,
  jumpAt,
  outsideDonut,
  type Variance,
} from '../../src/jump/index.js'
import { base64OfNumbers, numbersOfBase64, seededRandom } from '../../src/math/index.js'
import { addressOf, type State, stateOf } from '../../src/report/client/address.js'
import { curveOf, estimateAt, kernels } from '../../src/report/client/again.js'
import { settled } from '../../src/report/client/model.js'
import type { BySide, Estimate, Jump } from '../../src/results.js'
import type { Study } from '../../src/study/index.js'
import { analysisOf, inputsOf, inventUnits, modelOfPage, pageOf, studyOf } from './whatIfStudies.js'

/** Of the number itself: what the panel promises. Sums in another order differ by a hundred-thousandth of this. */
const tolerance = 1e-9

const close = (got: number, wanted: number, what: string) =>
  expect(Math.abs(got - wanted) / Math.abs(wanted), `${what}: ${got}, ${wanted}`).toBeLessThan(tolerance)

function randomEntries(seed: number, offset: number): Required<Pick<Entries, 'x' | 'treated' | 'unit' | 'y' | 'w'>> {
  const random = seededRandom(seed)
  const count = 900
  const x = Float64Array.from({ length: count }, () => 2 * random.next() ** 2 - 0.8)
  return {
    x,
    treated: Uint8Array.from(x, (value) => (value >= 0 ? 1 : 0)),
    unit: Int32Array.from(x, (_, i) => i),
    y: Float64Array.from(x, (value) => offset + Math.cos(2 * value) + (value >= 0 ? 0.3 : 0) + random.next()),
    w: Float64Array.from(x, () => 0.2 + 3 * random.next()),
  }
}

describe('sums of each side', () => {
  const variances: Variance[] = ['hc0', 'hc1', 'hc2', 'hc3', 'neighbours']
  const bandwidths = [0.12, 0.31, 0.55, 0.9]
  const donuts = [0, 0.05]
  it.each(variances)('give the jump of any two bandwidths, kernel, order and hole: %s', (variance) => {
    for (const [seed, offset, isWeighted] of [
      [1, 0, false],
      [2, 1e6, true],
    ] as const) {
      const { w, ...entries } = randomEntries(seed, offset)
      const sample = buildSample(isWeighted ? { ...entries, w } : entries)
      const subject = {
        from: 'sides' as const,
        bandwidths,
        donuts,
        variations: [],
        sums: sumsOfSides(sample, donuts, bandwidths, variance),
        units: {
          untreated: unitsWithin(sample.untreated, donuts, bandwidths),
          treated: unitsWithin(sample.treated, donuts, bandwidths),
        },
        centre: sample.centre,
        cells: undefined as never,
      }
      const own = { untreated: bandwidths[2], treated: bandwidths[1] }
      for (const reference of ['t', 'normal'] as const)
        for (const kernel of kernels)
          for (const order of [1, 2] as const)
            for (const [donut, hole] of donuts.entries())
              for (const side of ['both', 'untreated', 'treated'] as const) {
                const settings = { reference, level: 0.95 }
                const made = estimateAt(subject, own, 3, { side, kernel, order, donut }, settings)
                const h = {
                  untreated: side === 'treated' ? own.untreated : bandwidths[3],
                  treated: side === 'untreated' ? own.treated : bandwidths[3],
                }
                const options = { order, kernel, variance, ...settings }
                const wanted = jumpAt(outsideDonut(sample, hole), { h, b: h }, options)
                if (!wanted.ok || !made) throw new Error('no estimate')
                expect(made.units).toEqual(wanted.jump.unitsInBandwidth)
                for (const name of ['untreated', 'treated'] as const) {
                  const curve = curveOf(subject, name, bandwidths.indexOf(h[name]), { kernel, order, donut })
                  for (const t of [0, h[name] / 2, h[name]])
                    close(
                      curve?.(t) ?? Number.NaN,
                      fittedAt(wanted.jump.fits[name], t) + sample.centre,
                      `curve at ${t}`,
                    )
                }
                for (const kind of ['plain', 'corrected'] as const)
                  for (const key of [
                    'estimate',
                    'standardError',
                    'low',
                    'high',
                    'p',
                  ] as const satisfies (keyof Inference)[])
                    close(
                      made[kind][key],
                      wanted.jump[kind][key],
                      `${variance} ${kernel} ${order} ${side} ${kind} ${key}`,
                    )
              }
    }
  })

  it('say nothing where the outcome is the same for every unit', () => {
    const entries = randomEntries(3, 0)
    const y = entries.y.map((value, i) => (Math.abs(entries.x[i]) < 0.2 ? 5 : value))
    const sums = sumsOfSides(buildSample({ ...entries, y }), [0], [0.15, 0.4], 'hc2')
    expect([...sums.subarray(0, 90)].every(Number.isNaN)).toBe(true)
    expect([...sums.subarray(90)].some(Number.isNaN)).toBe(false)
  })
})

/** Every road an estimate can take, with where the page has it from. */
const studies: readonly (readonly [string, string, 'sides' | 'table'])[] = [
  ['plain pooling', '', 'sides'],
  ['weights', '# weighted', 'sides'],
  ['neighbours', 'estimation: {variance: neighbours, reference: normal}', 'sides'],
  ['sides apart and a hole', 'estimation: {sides: separate, donut: 0.3, variance: hc3}', 'sides'],
  ['fixed effects', 'pooling: {fixed_effects: true}\n# weighted', 'table'],
  ['neighbours and fixed effects', 'pooling: {fixed_effects: true}\nestimation: {variance: neighbours}', 'table'],
  ['clusters', '# cluster', 'table'],
  ['few clusters', '# cluster\nestimation: {variance: few-clusters}', 'table'],
  ['covariates', 'covariates: [age]', 'table'],
  ['take-up', 'take_up: took', 'table'],
]

function fixedAt(study: Study, { kernel, order, donut }: State, bandwidth: BySide): Study {
  const { estimation } = study
  return {
    ...study,
    estimation: {
      ...estimation,
      kernel: kernel ?? estimation.kernel,
      order: order ?? estimation.order,
      donut: donut ?? estimation.donut,
      bandwidth: { kind: 'fixed', ...bandwidth },
    },
  }
}

describe.each(studies)('the panel of a study with %s', (name, text, from) => {
  const study = studyOf(text)
  const inputs = inputsOf(inventUnits(2600, 2, 5))
  const analysis = analysisOf(study, inputs)
  const model = modelOfPage(pageOf(study, analysis))
  const [outcome] = analysis.results.outcomes
  const base: State = { outcome: 'y', side: 'both' }
  const ready = model.readyOf(model.panelOf(base))
  const line = { ...base, line: analysis.results.lines[1].line }
  const byLine = model.readyOf(model.panelOf(line))?.subject.bandwidths ?? []

  it('shows the study’s own numbers at its choice', () => {
    const pooled = outcome.pooled as Jump
    expect(model.shown(base, model.panelOf(base))).toMatchObject({ isStudy: true, bandwidth: pooled.bandwidth })
    expect(model.shown(base, model.panelOf(base))?.corrected.estimate).toBe(pooled.corrected.estimate)
  })

  it('gives what a run with that bandwidth gives, pooled and by line', () => {
    expect(ready?.subject.from).toBe(from)
    const { bandwidths = [], donuts = [] } = ready?.subject ?? {}
    expect(bandwidths.length).toBeGreaterThan(5)
    const isFull = donuts.length > 1
    expect(isFull || name === 'few clusters').toBe(true)
    // one at which every variation is made
    const wide = bandwidths[6 * Math.floor((bandwidths.length - 1) / 6)]
    const asked: State[] = [
      { ...base, bandwidth: bandwidths[2] },
      { ...base, bandwidth: wide, kernel: 'epanechnikov', order: 2 },
      ...(isFull
        ? [
            { ...base, bandwidth: wide, side: 'treated' as const, kernel: 'uniform' as const },
            { ...base, bandwidth: wide, side: 'untreated' as const, order: 2 as const },
            { ...base, bandwidth: wide, donut: donuts[1] },
          ]
        : []),
      ...byLine.slice(-1).map((bandwidth) => ({ ...line, bandwidth, kernel: 'uniform' as const, order: 2 as const })),
    ]
    for (const one of asked) {
      const state = settled(model, one)
      const panel = model.panelOf(state)
      const made = model.shown(state, panel)
      if (!made) throw new Error(`nothing at ${addressOf(state)}`)
      const again = analysisOf(fixedAt(study, state, made.bandwidth), inputs).results.outcomes[0]
      const wanted = one.line ? (again.lines[1] as unknown as Jump) : (again.pooled as Jump)
      expect([state.side, state.donut]).toEqual([one.side, one.donut])
      if (one.side !== 'treated') expect(made.bandwidth.untreated).toBe(one.bandwidth)
      if (one.side !== 'untreated') expect(made.bandwidth.treated).toBe(one.bandwidth)
      const { untreated, treated } = wanted.units_in_bandwidth
      expect([made.units.untreated, made.units.treated]).toEqual(
        [untreated, treated].map((n) => n.toLocaleString('en')),
      )
      for (const kind of ['plain', 'corrected'] as const)
        for (const key of ['estimate', 'low', 'high', 'p'] as const satisfies (keyof Estimate)[])
          close(made[kind][key], wanted[kind][key], `${addressOf(state)} ${kind} ${key}`)
    }
  })
})

describe('the address', () => {
  it('gives the state back', () => {
    const lines = ['North & South', '2']
    const states: State[] = [
      { outcome: 'log rent', side: 'both' },
      { outcome: 'y', side: 'both', line: lines[0], bandwidth: 812.5, kernel: 'uniform', order: 2, donut: 30 },
      { outcome: 'y', side: 'treated', bandwidth: 0.1 + 0.2, fit: 'plain' },
    ]
    for (const state of states) expect(stateOf(addressOf(state), ['y', 'log rent'], lines)).toEqual(state)
  })

  it('leaves out what it can’t read, and is not taken for another place of the page', () => {
    const read = stateOf('#what-if?outcome=z&bandwidth=wide&kernel=gaussian&order=7&donut=-1', ['y'], [])
    expect(read).toEqual({ outcome: 'y', side: 'both' })
    for (const other of ['', '#figures', '#what-if-then']) expect(stateOf(other, ['y'], [])).toBeUndefined()
  })
})

it('doubles come back from base64 to the bit', () => {
  const values = Float64Array.of(0, -0, 1 / 3, Number.NaN, 5e-324, -1.7976931348623157e308, Number.POSITIVE_INFINITY)
  for (let length = 0; length <= values.length; length++) {
    const text = base64OfNumbers(values.subarray(0, length))
    expect(text).toBe(Buffer.from(values.buffer, 0, 8 * length).toString('base64'))
    expect(numbersOfBase64(text)).toEqual(values.slice(0, length))
  }
  expect(() => numbersOfBase64('ab!d')).toThrow(RangeError)
})
