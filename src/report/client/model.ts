/** What the panel shows in a state: the study's own numbers, or an estimate made again. No DOM here. */
import type { Kernel } from '../../jump/index.js'
import type { BySide } from '../../results.js'
import { count } from '../numbers.js'
import type { PanelData, PanelEstimate, PanelOutcome, PanelSubject } from '../whatIfData.js'
import type { State } from './address.js'
import {
  type Choices,
  estimateAt,
  kernels,
  type Made,
  nearestPlace,
  placesWith,
  type Subject,
  subjectOf,
} from './again.js'

export interface Shown extends PanelEstimate {
  readonly isStudy: boolean
}

/** A subject that can be made again, decoded. */
export interface Ready {
  readonly subject: Subject
  readonly own: BySide
}

export interface Model {
  readonly data: PanelData
  readonly outcomeOf: (state: State) => PanelOutcome
  /** Of the line in the state, or pooled. */
  readonly panelOf: (state: State) => PanelSubject
  readonly readyOf: (panel: PanelSubject) => Ready | undefined
  readonly choicesOf: (state: State, subject: Subject) => Choices | undefined
  /** Places of the bandwidths that the state's other choices leave. */
  readonly placesOf: (state: State) => number[]
  readonly shown: (state: State, panel: PanelSubject) => Shown | undefined
  readonly at: (state: State, ready: Ready, place: number) => Made | undefined
}

/** Nothing in it differs from the study's choice. */
export function isStudyChoice({ bandwidth, kernel, order, donut }: State): boolean {
  return bandwidth === undefined && kernel === undefined && order === undefined && donut === undefined
}

export function kernelOf(data: PanelData, state: State): Kernel {
  return state.kernel ?? kernels.find((kernel) => kernel === data.kernel) ?? 'triangular'
}

/** The study's order where it is 1 or 2, else the one nearest to it. */
export function orderOf(data: PanelData, state: State): 1 | 2 {
  return state.order ?? (data.order >= 2 ? 2 : 1)
}

export function modelOf(data: PanelData): Model {
  const decoded = new Map<PanelSubject, Ready>()
  const settings = { reference: data.reference, level: data.level }
  const outcomeOf = ({ outcome }: State) => data.outcomes.find((one) => one.outcome === outcome) ?? data.outcomes[0]
  const panelOf = (state: State) => {
    const outcome = outcomeOf(state)
    const place = data.all.findIndex(({ line }) => line === state.line)
    return place < 0 ? outcome.pooled : outcome.lines[place]
  }
  const readyOf = (panel: PanelSubject) => {
    const { own, again } = panel
    if (!own || !again) return undefined
    const ready = decoded.get(panel) ?? { subject: subjectOf(again), own: own.bandwidth }
    decoded.set(panel, ready)
    return ready
  }
  const choicesOf = (state: State, { donuts }: Subject): Choices | undefined => {
    const donut = state.donut === undefined ? 0 : donuts.indexOf(state.donut)
    if (donut < 0) return undefined
    return { side: state.side, kernel: kernelOf(data, state), order: orderOf(data, state), donut }
  }
  const at = (state: State, { subject, own }: Ready, place: number) => {
    const choices = choicesOf(state, subject)
    return choices && estimateAt(subject, own, place, choices, settings)
  }
  const placesOf = (state: State) => {
    const ready = readyOf(panelOf(state))
    const choices = ready && choicesOf(state, ready.subject)
    return ready && choices ? placesWith(ready.subject, ready.own, choices, settings) : []
  }
  const shown = (state: State, panel: PanelSubject): Shown | undefined => {
    if (isStudyChoice(state)) return panel.own && { ...panel.own, isStudy: true }
    const ready = readyOf(panel)
    if (!ready) return undefined
    const made = at(state, ready, nearestPlace(ready.subject.bandwidths, wantedBandwidth(state, ready.own)))
    if (!made) return undefined
    const { untreated, treated } = made.units
    return { ...made, units: { untreated: count(untreated), treated: count(treated) }, isStudy: false }
  }
  return { data, outcomeOf, panelOf, readyOf, choicesOf, placesOf, shown, at }
}

/** The state's bandwidth, or the study's own. */
export function wantedBandwidth({ bandwidth, side }: State, own: BySide): number {
  return bandwidth ?? (side === 'treated' ? own.treated : own.untreated)
}

/** The same state with what its subject does not offer put at the nearest that it does. */
export function settled(model: Model, state: State): State {
  const ready = model.readyOf(model.panelOf(state))
  if (!ready || isStudyChoice(state)) return state
  const { donuts, bandwidths } = ready.subject
  const { donut } = state
  const nearest = donut === undefined ? 0 : donuts.reduce((a, b) => (Math.abs(b - donut) < Math.abs(a - donut) ? b : a))
  const holed = { ...state, donut: donut === undefined || nearest === donuts[0] ? undefined : nearest }
  const sided = model.placesOf(holed).length > 0 ? holed : { ...holed, side: 'both' as const }
  const places = model.placesOf(sided)
  if (places.length === 0) return sided
  const widths = places.map((place) => bandwidths[place])
  return { ...sided, bandwidth: widths[nearestPlace(widths, wantedBandwidth(sided, ready.own))] }
}
