/** What is drawn of the test of density: units in bins on both sides of the line, and the two densities at the line itself. */
import type { RandomGround } from '../borders/index.js'
import type { DensityTest } from '../checks/index.js'
import type { Placement } from '../placement.js'
import type { DensityExhibit } from '../results.js'
import type { Study } from '../study/index.js'

/** Bins within the bandwidth of the test; as many again are drawn beyond it. */
const binsWithinBandwidth = 10
/** Land is told by random points; a bin with fewer has no density. */
const fewestPoints = 50

type Points = Pick<Placement, 'x' | 'treated'>

/** Units per unit of x. */
export function scoreExhibit(study: Study, placement: Placement, test: DensityTest): DensityExhibit {
  const n = placement.x.length
  const { untreated, treated } = test.corrected
  const atLine = (slope: typeof treated) => ({
    density: n * slope.density,
    standardError: n * slope.standardError,
  })
  return {
    perSquareKm: false,
    bins: binsOf(placement, test.bandwidth, study.disclosure.smallestCell, (_, __, width) => width),
    atLine: { untreated: atLine(untreated), treated: atLine(treated) },
    ratio: treated.density / untreated.density,
    p: test.p,
    bandwidth: test.bandwidth,
    units: test.units,
  }
}

/** Units per km² of the land that they could have been placed from. `units` and `land`: tests within the ground's radius. */
export function groundExhibit(
  study: Study,
  placement: Placement,
  ground: RandomGround,
  found: { readonly units: DensityTest; readonly land: DensityTest; readonly ratio: number; readonly p: number },
): DensityExhibit {
  const { units, land, ratio, p } = found
  const bandwidth = units.bandwidth
  const points = countsOf(ground, bandwidth)
  const radius = radiusOf(ground)
  const near = placement.x.filter((x) => Math.abs(x) < radius).length
  const atLine = (side: 'untreated' | 'treated') => {
    const [unit, point] = [units.corrected[side], land.corrected[side]]
    const density = (unit.density * near) / ((point.density * ground.x.length) / ground.perSquareKm)
    const share = Math.hypot(unit.standardError / unit.density, point.standardError / point.density)
    return { density, standardError: density * share }
  }
  return {
    perSquareKm: true,
    bins: binsOf(placement, bandwidth, study.disclosure.smallestCell, (side, bin) => {
      const count = points[side][bin]
      return count >= fewestPoints ? count / ground.perSquareKm : Number.NaN
    }).filter(({ high, low }) => Math.max(Math.abs(high), Math.abs(low)) <= radius),
    atLine: { untreated: atLine('untreated'), treated: atLine('treated') },
    ratio,
    p,
    bandwidth,
    units: units.units,
  }
}

/** The farthest random point: land is not known beyond. */
const radiusOf = ({ x }: RandomGround) => x.reduce((most, value) => Math.max(most, Math.abs(value)), 0)

type Counts = Readonly<Record<'untreated' | 'treated', Float64Array>>

function countsOf({ x, treated }: Points, bandwidth: number): Counts {
  const width = bandwidth / binsWithinBandwidth
  const count = 2 * binsWithinBandwidth
  const counts = { untreated: new Float64Array(count), treated: new Float64Array(count) }
  for (let i = 0; i < x.length; i++) {
    const bin = Math.floor(Math.abs(x[i]) / width)
    if (bin < count) counts[treated[i] === 1 ? 'treated' : 'untreated'][bin]++
  }
  return counts
}

/** `room`: what a bin's units are counted over; NaN where that is not known. */
function binsOf(
  points: Points,
  bandwidth: number,
  smallestCell: number,
  room: (side: 'untreated' | 'treated', bin: number, width: number) => number,
): DensityExhibit['bins'] {
  const width = bandwidth / binsWithinBandwidth
  const counts = countsOf(points, bandwidth)
  return (['untreated', 'treated'] as const).flatMap((side) =>
    Array.from(counts[side], (units, bin) => {
      const [near, far] = [bin * width, (bin + 1) * width]
      const isSmall = units > 0 && units < smallestCell
      const density = isSmall ? Number.NaN : units / room(side, bin, width)
      return {
        side,
        low: side === 'treated' ? near : -far,
        high: side === 'treated' ? far : -near,
        units: isSmall ? null : units,
        density: Number.isFinite(density) ? density : null,
      }
    }),
  )
}
