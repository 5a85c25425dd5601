/** The panel of both example studies at 20 bandwidths, three kernels and two orders, with the program's own numbers. */
import { describe, expect, it } from 'vitest'
import { addressOf, type State } from '../../src/report/client/address.js'
import { kernels } from '../../src/report/client/again.js'
import { pooledOf, runExample } from '../report/whatIfExamples.js'
import { modelOfPage, pageOf } from '../report/whatIfStudies.js'

/** Of the number itself. */
const tolerance = 1e-9

describe.each(['hedgerows', 'quillhaven'])('the panel of %s', (name) => {
  it('gives what runs with those bandwidths give', async () => {
    const { study, analysis } = await runExample(name)
    const model = modelOfPage(pageOf(study, analysis))
    const states = analysis.exhibits.outcomes.flatMap(({ outcome, whatIf }) =>
      (whatIf?.pooled?.bandwidths ?? [])
        .slice(-20)
        .flatMap((bandwidth) =>
          kernels.flatMap((kernel) =>
            ([1, 2] as const).map((order): State => ({ outcome, side: 'both', bandwidth, kernel, order })),
          ),
        ),
    )
    expect(states.length).toBe(study.outcomes.length * 120)
    for (let start = 0; start < states.length; start += 60) {
      const some = states.slice(start, start + 60)
      const program = (await runExample(name, some)).analysis
      for (const [place, state] of some.entries()) {
        const wanted = pooledOf(program, state.outcome, place)
        const made = model.shown(state, model.panelOf(state))
        if (!made) throw new Error(`nothing at ${addressOf(state)}`)
        expect(made.bandwidth).toEqual(wanted.bandwidth)
        for (const kind of ['plain', 'corrected'] as const)
          for (const key of ['estimate', 'low', 'high', 'p'] as const) {
            const off = Math.abs(made[kind][key] - wanted[kind][key]) / Math.abs(wanted[kind][key])
            expect(off, `${addressOf(state)} ${kind} ${key}`).toBeLessThan(tolerance)
          }
      }
    }
  })
})
