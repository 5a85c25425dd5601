/** The panel's inputs: native, labelled, and always what the state says. */
import { significant } from '../numbers.js'
import type { State } from './address.js'
import { kernels, nearestPlace, type WhichSide } from './again.js'
import { make, type Option, offer } from './dom.js'
import { isStudyChoice, kernelOf, type Model, orderOf, settled, wantedBandwidth } from './model.js'
import { widthWords } from './words.js'

export interface Controls {
  readonly root: HTMLElement
  readonly show: (state: State) => void
}

const capital = (text: string) => text[0].toUpperCase() + text.slice(1)

/** `change` is told the state that the reader asks for. */
export function controlsOf(model: Model, change: (state: State) => void): Controls {
  const { data } = model
  let state: State = { outcome: data.outcomes[0].outcome, side: 'both' }
  let places: readonly number[] = []
  const select = (id: string, asked: (value: string) => Partial<State>) => {
    const input = make('select', { id: `what-if-${id}` })
    input.addEventListener('change', () => change(settled(model, { ...state, ...asked(input.value) })))
    return input
  }
  const outcome = select('outcome', (value) => ({ outcome: value }))
  const line = select('line', (value) => ({ line: value === '' ? undefined : value }))
  const kernel = select('kernel', (value) => ({ kernel: kernels.find((name) => name === value) }))
  const order = select('order', (value) => ({ order: value === '2' ? 2 : 1 }))
  const donut = select('donut', (value) => ({ donut: Number(value) }))
  const side = select('side', (value) => ({ side: value as WhichSide, bandwidth: undefined }))
  const slider = make('input', { id: 'what-if-bandwidth', type: 'range', min: 0, step: 1 })
  slider.addEventListener('input', () => {
    const bandwidth = ready()?.subject.bandwidths[places[Number(slider.value)]]
    if (bandwidth !== undefined) change(settled(model, { ...state, bandwidth }))
  })
  const width = make('output', { id: 'what-if-width', for: 'what-if-bandwidth' })
  const fit = make('input', { id: 'what-if-fit', type: 'checkbox' })
  fit.addEventListener('change', () => change({ ...state, fit: fit.checked ? 'plain' : undefined }))
  const reset = make('button', { type: 'button' }, 'Back to the study’s choice')
  reset.addEventListener('click', () => change({ outcome: state.outcome, line: state.line, side: 'both' }))
  const ready = () => model.readyOf(model.panelOf(state))

  const field = (label: string, input: HTMLElement) => make('p', {}, make('label', { for: input.id }, label), input)
  const root = make(
    'form',
    { class: 'choices', 'aria-label': 'What to estimate again' },
    make(
      'div',
      { class: 'fields' },
      ...(data.outcomes.length > 1 ? [field('Outcome', outcome)] : []),
      ...(data.all.length > 0 ? [field('Of', line)] : []),
      field('Kernel', kernel),
      field('Order', order),
      field('Left out at the line (donut)', donut),
      field('Bandwidth that moves', side),
    ),
    make('p', { class: 'slide' }, make('label', { for: slider.id }, 'Bandwidth'), slider, width),
    make('p', { class: 'tick' }, fit, make('label', { for: fit.id }, 'Draw the plain curves')),
    reset,
  )
  root.addEventListener('submit', (event) => event.preventDefault())
  const lines = [
    { value: '', label: `all ${data.all.length} ${data.lines}, pooled` },
    ...data.all.map((one) => ({ value: one.line, label: one.label })),
  ]

  function show(next: State): void {
    state = next
    const now = ready()
    offer(
      outcome,
      data.outcomes.map((one) => ({ value: one.outcome, label: one.outcome })),
      state.outcome,
    )
    offer(line, lines, state.line ?? '')
    offer(kernel, now ? kernels.map((name) => ({ value: name, label: capital(name) })) : [], kernelOf(data, state))
    offer(order, now ? orders(state) : [], String(isStudyChoice(state) ? data.order : orderOf(data, state)))
    const donuts = now?.subject.donuts ?? []
    const holes = donuts.map((value) => ({ value: String(value), label: holeWords(value) }))
    offer(donut, holes, String(state.donut ?? donuts[0] ?? ''))
    offer(side, sidesFor(state), state.side)
    places = model.placesOf(state)
    showSlider()
    fit.checked = state.fit === 'plain'
    fit.disabled = now?.subject.from !== 'sides'
    reset.disabled = isStudyChoice(state)
  }

  /** 1 and 2, and at the study's choice its own. */
  function orders(of: State): Option[] {
    const own = isStudyChoice(of) && data.order !== 1 && data.order !== 2 ? [data.order] : []
    return [1, 2, ...own].map((value) => ({ value: String(value), label: String(value) }))
  }

  function holeWords(value: number): string {
    return value === 0 ? 'nothing' : `nearer than ${significant(value)}${data.unit}`
  }

  /** The sides whose bandwidth can be moved alone with the state's other choices. */
  function sidesFor(of: State): Option[] {
    const all: Option[] = [
      { value: 'both', label: 'both sides' },
      { value: 'untreated', label: 'untreated side alone' },
      { value: 'treated', label: 'treated side alone' },
    ]
    return all.filter(({ value }) => model.placesOf({ ...of, side: value as WhichSide }).length > 0)
  }

  function showSlider(): void {
    const now = ready()
    const shown = model.shown(state, model.panelOf(state))
    slider.disabled = places.length < 2 || !now
    slider.max = String(Math.max(0, places.length - 1))
    if (now && places.length > 0) {
      const widths = places.map((place) => now.subject.bandwidths[place])
      slider.value = String(nearestPlace(widths, wantedBandwidth(state, now.own)))
    }
    const words = shown ? widthWords(shown.bandwidth, data.unit) : 'none here'
    const text = isStudyChoice(state) && shown ? `${words}, the study’s choice` : words
    width.textContent = text
    slider.setAttribute('aria-valuetext', text)
  }

  return { root, show }
}
