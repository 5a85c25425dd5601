/** What the report draws beside the numbers: binned means, fitted curves, the map. No record leaves through here. */
import type { Border } from '../borders/index.js'
import { fittedAt, type LocalFit, type Sample, type Side } from '../jump/index.js'
import type { MapExhibit, OutcomeExhibit, ScatterBin, ScatterExhibit } from '../results.js'
import type { Study } from '../study/index.js'
import type { LineEstimate, TakeUpMade } from './estimating.js'

/** Bins within one bandwidth; as many again are drawn beyond it. */
const binsWithinBandwidth = 10
const pointsOfCurve = 33

/**
 * Binned means within twice the bandwidth on each side and the plain fit within it. Bins are a tenth of the bandwidth
 * wide, widened outward until they hold `smallestCell` units; what is left over at the end is not drawn.
 */
export function scatterOf({ jump, sample }: LineEstimate, smallestCell: number): ScatterExhibit {
  const { h } = jump.bandwidths
  return {
    bins: [
      ...binsOf(sample, 'untreated', h.untreated, smallestCell).reverse(),
      ...binsOf(sample, 'treated', h.treated, smallestCell),
    ],
    fit: {
      untreated: curveOf(jump.fits.untreated, h.untreated, -1, sample.centre),
      treated: curveOf(jump.fits.treated, h.treated, 1, sample.centre),
    },
  }
}

/** Take-up in place of the outcome. */
export function takeUpOf(
  { estimation, disclosure }: Study,
  { first, column }: TakeUpMade,
): NonNullable<OutcomeExhibit['takeUp']> {
  return {
    ...scatterOf(first, disclosure.smallestCell),
    column,
    bandwidth: first.jump.bandwidths.h,
    units_in_bandwidth: first.jump.unitsInBandwidth,
    order: estimation.order,
    kernel: estimation.kernel,
  }
}

function binsOf(sample: Sample, name: 'untreated' | 'treated', h: number, smallestCell: number): ScatterBin[] {
  const side = sample[name]
  const sign = name === 'treated' ? 1 : -1
  const width = h / binsWithinBandwidth
  const bins: ScatterBin[] = []
  let from = 0
  let low = 0
  for (let step = 1; step <= 2 * binsWithinBandwidth; step++) {
    const high = step * width
    let to = from
    while (to < side.t.length && side.t[to] < high) to++
    if (to - from < smallestCell) continue
    const { x, mean, standardError } = meansOf(side, from, to)
    bins.push({
      side: name,
      low: sign > 0 ? low : -high,
      high: sign > 0 ? high : -low,
      x: sign * x,
      mean: mean + sample.centre,
      standardError,
      units: to - from,
    })
    from = to
    low = high
  }
  return bins
}

/** Weighted means of t and y, and the standard error of the latter. */
export function meansOf(side: Side, from: number, to: number): { x: number; mean: number; standardError: number } {
  let total = 0
  let x = 0
  let mean = 0
  for (let i = from; i < to; i++) {
    const w = side.w === null ? 1 : side.w[i]
    total += w
    x += w * side.t[i]
    mean += w * side.y[i]
  }
  x /= total
  mean /= total
  let squares = 0
  for (let i = from; i < to; i++) squares += ((side.w === null ? 1 : side.w[i]) * (side.y[i] - mean)) ** 2
  const n = to - from
  const standardError = n > 1 ? Math.sqrt((squares * n) / (n - 1)) / total : 0
  return { x, mean, standardError }
}

function curveOf(fit: LocalFit, h: number, sign: number, centre: number): { x: number[]; y: number[] } {
  // the farthest unit's own distance is not for drawing: the curve ends at the edge of a bin before it
  const bin = h / binsWithinBandwidth
  const end = fit.scale >= h ? h : Math.max(bin, Math.floor(fit.scale / bin) * bin)
  const x: number[] = []
  const y: number[] = []
  for (let i = 0; i < pointsOfCurve; i++) {
    const t = (end * i) / (pointsOfCurve - 1)
    x.push(sign * t || 0)
    y.push(fittedAt(fit, t) + centre)
  }
  return { x, y }
}

/** Zones, pieces and barriers as drawn shapes. */
export function mapOf(border: Border, lineIds: readonly string[], barriers: MapExhibit['barriers']): MapExhibit {
  let used = 0
  return {
    zones: border.zones.names.map((name, i) => ({
      name,
      treated: border.treatedZone[i] === 1,
      polygons: border.zones.polygons[i],
    })),
    pieces: border.pieces.map((piece) => ({
      line: piece.setAside === undefined ? lineIds[used++] : null,
      zones: piece.zones,
      piece: piece.piece,
      lengthMetres: piece.lengthMetres,
      setAside: piece.setAside,
      coordinates: [piece.coordinates],
    })),
    barriers,
  }
}
