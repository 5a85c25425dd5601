/** The panel: inputs above, the answer, and three figures that follow. */
import { significant } from '../numbers.js'
import type { PanelSubject } from '../whatIfData.js'
import { addressOf, type State, stateOf } from './address.js'
import { curveOf } from './again.js'
import { controlsOf } from './controls.js'
import { curveFigure } from './curve.js'
import { make } from './dom.js'
import { forestIn } from './forest.js'
import { isStudyChoice, kernelOf, type Model, orderOf, type Ready, type Shown, settled } from './model.js'
import { type ScatterCurve, scatterFigure } from './scatter.js'
import { answerParts, detailWords, routeWords } from './words.js'

/** Fills the panel and keeps panel and address the same. */
export function startPanel(root: HTMLElement, model: Model): void {
  const { data } = model
  const names = data.outcomes.map(({ outcome }) => outcome)
  const ids = data.all.map(({ line }) => line)
  const answer = make('p', { class: 'now', role: 'status', 'aria-live': 'polite', id: 'what-if-answer' })
  const notes = make('div', { class: 'notes' })
  const drawing = (name: string, caption: string, isTall = false) => {
    const box = make('div', {
      class: isTall ? 'drawing tall' : 'drawing',
      tabindex: 0,
      role: 'region',
      'aria-label': `What if: ${name}`,
    })
    return { box, figure: make('figure', {}, box, make('figcaption', {}, caption)) }
  }
  const curve = drawing(
    'the estimate against the bandwidth',
    `Corrected estimates at every bandwidth on offer, shaded: their ${data.levelWords} intervals. Diamond: the study’s own. Ring: the bandwidth chosen.`,
  )
  const scatter = drawing(
    'means by distance',
    'Means of the units between neighbouring bandwidths, bars ±1.96 standard errors. Hollow: untreated; filled: treated. Dashed: the bandwidth in use. Nothing is taken out of the means, be it fixed effects or covariates.',
  )
  const forest = drawing(
    `every ${data.line}`,
    `Every ${data.line} with the same choices, at the nearest bandwidth that it has. Bars: ${data.levelWords} intervals; filled: zero excluded. Wide ones are cut at the edge.`,
    true,
  )
  const drawForest = forestIn(forest.box)
  const controls = controlsOf(model, (state) => {
    show(state)
    history.replaceState(null, '', addressOf(state))
  })
  root.replaceChildren(
    controls.root,
    answer,
    notes,
    make('div', { class: 'pair' }, curve.figure, scatter.figure),
    ...(data.all.length > 0 ? [forest.figure] : []),
  )

  function show(state: State, asked?: number): void {
    controls.show(state)
    const panel = model.panelOf(state)
    const { places } = model.outcomeOf(state)
    const shown = model.shown(state, panel)
    const own = panel.own && { ...panel.own, isStudy: true }
    const ready = model.readyOf(panel)
    const donut = state.donut ?? data.donut
    const of = data.all.find(({ line }) => line === state.line)?.label ?? 'pooled'
    const parts = shown ? answerParts(data, shown, own, places) : [noneWords(panel)]
    const nodes = parts.map((part) =>
      typeof part === 'string' ? part : make('data', { value: part.value }, part.text),
    )
    answer.replaceChildren(`${state.outcome}, ${of}: `, ...nodes)
    const details = shown
      ? [
          detailWords(
            data,
            shown,
            kernelOf(data, state),
            shown.isStudy ? data.order : orderOf(data, state),
            donut,
            places,
          ),
        ]
      : []
    const route = ready
      ? isStudyChoice(state)
        ? []
        : [routeWords[ready.subject.from]]
      : panel.own
        ? [routeWords.none]
        : []
    const moved =
      asked !== undefined && asked !== state.bandwidth && state.bandwidth !== undefined
        ? [
            `${significant(asked)}${data.unit} is not among the bandwidths here; ${significant(state.bandwidth)}${data.unit} is the nearest.`,
          ]
        : []
    notes.replaceChildren(...[...moved, ...details, ...route].map((text) => make('p', { class: 'note' }, text)))
    draw(state)
  }

  function noneWords({ own }: PanelSubject): string {
    return own ? 'No estimate can be made again here with these choices.' : 'The study has no estimate here.'
  }

  function draw(state: State): void {
    const panel = model.panelOf(state)
    const { places, outcome, pooled, lines } = model.outcomeOf(state)
    const shown = model.shown(state, panel)
    const ready = model.readyOf(panel)
    curve.figure.hidden = scatter.figure.hidden = !ready
    if (ready) {
      const { bandwidths } = ready.subject
      const made = model.placesOf(state).map((place) => ({
        bandwidth: bandwidths[place],
        ...(model.at(state, ready, place)?.corrected as { estimate: number; low: number; high: number }),
      }))
      const at = shown && (state.side === 'treated' ? shown.bandwidth.treated : shown.bandwidth.untreated)
      const own = panel.own && { ...panel.own, isStudy: true }
      const { unit, xUnit, levelWords, axis } = data
      curve.figure.hidden = made.length === 0
      if (made.length > 0)
        curve.box.innerHTML = curveFigure({ points: made, shown, at, own, outcome, unit, xUnit, levelWords, places })
      const donut = state.donut ?? data.donut
      scatter.box.innerHTML = scatterFigure({
        subject: ready.subject,
        shown,
        donut,
        outcome,
        axis,
        unit,
        places,
        curves: state.fit && shown ? curvesOf(state, ready, shown) : [],
      })
    }
    if (data.all.length === 0) return
    const rows = data.all.map(({ label }, i) => ({ label, shown: model.shown(state, lines[i]) }))
    const together = { label: 'pooled', shown: model.shown(state, pooled) }
    const { levelWords, lines: name } = data
    drawForest({ rows: [...rows, together], outcome, lines: name, levelWords, places })
  }

  function curvesOf(state: State, { subject }: Ready, shown: Shown): ScatterCurve[] {
    const isOther = isStudyChoice(state) && data.order !== orderOf(data, state)
    const choices = isOther ? undefined : model.choicesOf(state, subject)
    return (['untreated', 'treated'] as const).flatMap((side) => {
      const to = shown.bandwidth[side]
      const place = subject.bandwidths.indexOf(to)
      const at = choices && place >= 0 ? curveOf(subject, side, place, choices) : undefined
      return at ? [{ side, to, at }] : []
    })
  }

  const start: State = { outcome: names[0], side: 'both' }
  function fromAddress(): void {
    // the link to the section alone changes nothing in it
    const read = location.hash.includes('?') ? stateOf(location.hash, names, ids) : undefined
    if (!read) return
    show(settled(model, read), read.bandwidth)
    root.closest('section')?.scrollIntoView()
  }
  show(start)
  fromAddress()
  addEventListener('hashchange', fromAddress)
}
