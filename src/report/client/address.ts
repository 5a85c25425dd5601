/** The state of the panel as the address has it: `#what-if?outcome=log_rent&bandwidth=800&kernel=uniform`. No DOM here. */
import type { Kernel } from '../../jump/index.js'
import { kernels, type WhichSide } from './again.js'

/** What is not there is the study's own. Names are the study file's keys. */
export interface State {
  readonly outcome: string
  /** Id of a line; absent: pooled. */
  readonly line?: string
  readonly bandwidth?: number
  /** Whose bandwidth it is. */
  readonly side: WhichSide
  readonly kernel?: Kernel
  readonly order?: 1 | 2
  readonly donut?: number
  /** Whether the plain curves are drawn; of no estimate. */
  readonly fit?: 'plain'
}

const place = '#what-if'

/** Keys in this order; nothing of what is the study's own. */
export function addressOf(state: State): string {
  const { outcome, line, bandwidth, side, kernel, order, donut, fit } = state
  const width = side === 'both' ? 'bandwidth' : `bandwidth.${side}`
  const pairs = { outcome, line, [width]: bandwidth, kernel, order, donut, fit }
  const words = new URLSearchParams()
  for (const [key, value] of Object.entries(pairs)) if (value !== undefined) words.set(key, String(value))
  return `${place}?${words}`
}

/** Undefined where the address is not of the panel. What can't be read is left out. */
export function stateOf(address: string, outcomes: readonly string[], lines: readonly string[]): State | undefined {
  if (address !== place && !address.startsWith(`${place}?`)) return undefined
  const words = new URLSearchParams(address.slice(place.length + 1))
  const number = (key: string) => {
    const value = Number(words.get(key) ?? Number.NaN)
    return Number.isFinite(value) && value >= 0 ? value : undefined
  }
  const side = (['untreated', 'treated'] as const).find((name) => number(`bandwidth.${name}`)) ?? 'both'
  const [outcome, line, kernel, order] = ['outcome', 'line', 'kernel', 'order'].map((key) => words.get(key))
  const pairs = {
    line: lines.find((id) => id === line),
    bandwidth: number(side === 'both' ? 'bandwidth' : `bandwidth.${side}`) || undefined,
    kernel: kernels.find((name) => name === kernel),
    order: ([1, 2] as const).find((one) => String(one) === order),
    donut: number('donut'),
    fit: words.get('fit') === 'plain' ? ('plain' as const) : undefined,
  }
  const known = Object.fromEntries(Object.entries(pairs).filter(([, value]) => value !== undefined))
  return { ...known, outcome: outcomes.find((name) => name === outcome) ?? outcomes[0], side }
}
