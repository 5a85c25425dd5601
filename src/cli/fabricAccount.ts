/** How the zones of a border study fit together, as `inspect` tells it: boundaries by kind, gaps and overlaps, units in them. */
import { type AnalysisInputs, type Placed, positionColumns } from '../analyze.js'
import { borderFit, fabricOf, runnerUps, type Sliver, unitsChangingSide, widestSlivers } from '../borders/index.js'
import { numbersOf } from '../records/index.js'
import type { Study } from '../study/index.js'
import { count } from './doubts.js'

const sliversShown = 10
const pairsShown = 5
const nearlyAsNear = 1.25

export interface FabricAccount {
  readonly lines: readonly string[]
  readonly doubts: readonly string[]
}

/** Nothing for studies without zones. */
export function fabricAccount(study: Study, { table }: AnalysisInputs, placed: Placed): FabricAccount {
  const { border } = placed
  if (study.line.kind !== 'border' || !border) return { lines: [], doubts: [] }
  const { snap } = study.line
  const fabric = fabricOf(border.zones, snap)
  const totals = new Map<string, number>()
  for (const { metres } of fabric.zones) {
    for (const [label, length] of Object.entries(metres)) totals.set(label, (totals.get(label) ?? 0) + length)
  }
  const byLabel = [...totals].filter(([, metres]) => metres > 0).map(([label, metres]) => `${label} ${km(metres)}`)
  const { listed, others } = widestSlivers(fabric, sliversShown)
  const [lon, lat] = positionColumns(study).map((name) => numbersOf(table, name))
  const changing = unitsChangingSide(border, fabric, lon, lat)
  const [worst] = borderFit(border, snap)
  const farthest = worst ? Math.max(worst.untreatedMetres, worst.treatedMetres) : 0
  return {
    lines: [
      `boundaries of ${count(fabric.zones.length)} zones: ${byLabel.join(', ')}`,
      `farthest the border lies from the edge of one of its zones: ${metres(farthest)} (snap ${metres(snap)})`,
      `${count(changing.between)} units stand between the edges of two zones: ${count(changing.inGaps)} in gaps, ${count(changing.inOverlaps)} in overlaps`,
      ...secondBorder(placed, lon, lat),
      ...(listed.length > 0 ? ['gaps and overlaps, widest first'] : []),
      ...listed.map(sliverLine),
      ...(others.count > 0 ? [`  and ${count(others.count)} more, ${squareMetres(others.squareMetres)} in all`] : []),
    ],
    doubts: doubtfulPairs(fabric.pairs, border.zones.names, border.treatedZone),
  }
}

/** Units for which another pair's border is nearly as near: they could have served it. */
function secondBorder({ placement, border, known }: Placed, lon: Float64Array, lat: Float64Array): string[] {
  const measured = known?.measured
  if (!border || !measured || new Set(border.pieces.map(({ zones }) => zones.join('\0'))).size < 2) return []
  const { distanceMetres } = runnerUps(border, measured, lon, lat, placement.unit)
  const close = placement.unit.filter((unit, i) => distanceMetres[i] < nearlyAsNear * measured.distanceMetres[unit])
  const share = placement.unit.length > 0 ? Math.round((100 * close.length) / placement.unit.length) : 0
  return [
    `${count(close.length)} placed units (${share}%) have another pair's border less than ${nearlyAsNear} times as far`,
  ]
}

function sliverLine({ kind, zones, widestMetres, squareMetres: area, lon, lat, isWithinSnap }: Sliver): string {
  const place = `near ${lon.toFixed(5)}, ${lat.toFixed(5)}`
  const beyond = isWithinSnap ? '' : ', beyond snap'
  return `  ${kind} of ${zones.join(' and ')}: ${metres(widestMetres)} wide, ${squareMetres(area)}, ${place}${beyond}`
}

/** Treated and untreated neighbours that face each other beyond snap along part of their border. */
function doubtfulPairs(
  pairs: ReturnType<typeof fabricOf>['pairs'],
  names: readonly string[],
  treatedZone: Uint8Array,
): string[] {
  const isTreated = new Map(names.map((name, zone) => [name, treatedZone[zone] === 1]))
  const apart = pairs.filter(
    ({ zones, beyondMetres }) => beyondMetres > 0 && isTreated.get(zones[0]) !== isTreated.get(zones[1]),
  )
  const said = apart
    .slice(0, pairsShown)
    .map(
      ({ zones, beyondMetres, largestBeyondGapMetres }) =>
        `${zones.join(' and ')} face each other over ${km(beyondMetres)} beyond snap, up to ${metres(largestBeyondGapMetres)} apart: that stretch is no border`,
    )
  const more = apart.length - said.length
  return more > 0 ? [...said, `and ${count(more)} more such pairs`] : said
}

function km(length: number): string {
  return `${(length / 1000).toFixed(1)} km`
}

function metres(length: number): string {
  return length < 0.001 ? 'less than 1 mm' : `${Number(length.toPrecision(3))} m`
}

function squareMetres(area: number): string {
  return `${count(Math.round(area))} m²`
}
