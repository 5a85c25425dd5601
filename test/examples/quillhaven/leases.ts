/** Leases of Quillhaven: rents that rise by 0.08 in logarithms where the levy is paid, on ground that differs by place. */
import { type Draws, drawsFrom } from '../random.js'
import { drawTown, type LonLat, lonLatOf, type Plan, planOf, type Town } from './town.js'

/** What the levy does, the same everywhere: jumps from the untreated to the treated side. */
export const trueEffects = { log_rent: 0.08, vacant: 0.05 } as const

/** The river, not the levy, sets its two banks apart by up to this much; only pieces along the river feel it. */
const BANK_EFFECT = -0.3
export const BANK_REACH_METRES = 1000

const LEASES = 20_000
const OUTSIDE_TOWN = 70
const BLOCK_METRES = 300

/** Text of each file, by its path under boundaries/; the map is the same for every seed. */
export function quillhavenFiles(seed = 3): Record<string, string> {
  const town = drawTown()
  return {
    'quillhaven/zones.geojson': zonesText(town),
    'quillhaven/river.geojson': collectionText([
      feature({ name: 'Quill' }, { type: 'LineString', coordinates: town.river }),
    ]),
    'quillhaven/leases.csv': leasesText(town, seed),
  }
}

function zonesText(town: Town): string {
  return collectionText(
    town.zones.map(({ name, levied, ring }) =>
      feature({ name, levy: levied ? 'new' : 'none' }, { type: 'Polygon', coordinates: [ring] }),
    ),
  )
}

function feature(properties: object, geometry: object): string {
  return JSON.stringify({ type: 'Feature', properties, geometry })
}

/** One feature on each line. */
function collectionText(features: readonly string[]): string {
  return `{"type":"FeatureCollection","features":[\n${features.join(',\n')}\n]}\n`
}

function leasesText(town: Town, seed: number): string {
  const draws = drawsFrom(seed)
  const blockEffects = new Map<string, number>()
  const rows = ['lease,lon,lat,log_rent,vacant,beds,floor_area,signed_year,built,block']
  let outside = 0
  while (rows.length <= LEASES) {
    const place = lonLatOf(drawPlace(draws))
    const zone = town.zones.find(({ ring }) => isInside(ring, place))
    if (zone === undefined) {
      if (outside === OUTSIDE_TOWN) continue
      outside += 1
    }
    rows.push(
      [`L${10_000 + rows.length}`, ...leaseAt(place, zone?.levied ?? false, town, blockEffects, draws)].join(','),
    )
  }
  return `${rows.join('\n')}\n`
}

/** Most leases lie around three centres, the others anywhere. */
function drawPlace(draws: Draws): Plan {
  const centre = draws.uniform()
  if (centre < 0.4) return [200 + 2000 * draws.normal(), -600 + 1600 * draws.normal()]
  if (centre < 0.5) return [-2600 + 1300 * draws.normal(), 900 + 1300 * draws.normal()]
  if (centre < 0.6) return [3400 + 1200 * draws.normal(), -600 + 1400 * draws.normal()]
  return [13_000 * (draws.uniform() - 0.5), 10_600 * (draws.uniform() - 0.5)]
}

function leaseAt(
  place: LonLat,
  levied: boolean,
  town: Town,
  blockEffects: Map<string, number>,
  draws: Draws,
): (string | number)[] {
  const [east, north] = planOf(place)
  const block = `B${100 + Math.floor(east / BLOCK_METRES)}-${100 + Math.floor(north / BLOCK_METRES)}`
  if (!blockEffects.has(block)) blockEffects.set(block, 0.03 * draws.normal())
  const beds = bedsAt(draws.uniform())
  const floorArea = Math.round(24 + 17 * beds + 7 * draws.normal() + 4 * draws.uniform())
  const signedYear = draws.whole(2014, 2020)
  const built = Math.round(Math.min(2013, 1935 + 0.9 * Math.sqrt(Math.hypot(east, north)) + 28 * draws.normal()))

  const bank = levied ? BANK_EFFECT * bump(Math.hypot(east - town.bankMiddle[0], north - town.bankMiddle[1])) : 0
  const noise = (0.08 + 0.03 * (1 + Math.sin(east / 1800)) + 0.012 * beds) * draws.normal()
  const logRent =
    rentTrend(east / 1000, north / 1000) +
    0.09 * (beds - 2) +
    0.003 * (floorArea - 26 - 17 * beds) +
    0.018 * (signedYear - 2017) +
    (levied ? trueEffects.log_rent : 0) +
    bank +
    (blockEffects.get(block) as number) +
    noise
  const vacancy = 0.07 + 0.02 * Math.sin(north / 2500) + (levied ? trueEffects.vacant : 0)
  const vacant = draws.uniform() < vacancy ? 1 : 0

  const hasPosition = draws.uniform() >= 0.003
  const hasRent = draws.uniform() >= 0.012
  return [
    hasPosition ? place[0].toFixed(6) : '',
    hasPosition ? place[1].toFixed(6) : '',
    hasRent ? logRent.toFixed(3) : '',
    vacant,
    beds,
    floorArea,
    signedYear,
    built,
    block,
  ]
}

/** Shares of 0, 1 … 5 rooms to sleep in: 7, 26, 34, 21, 9 and 3 percent. */
function bedsAt(uniform: number): number {
  return [0.07, 0.33, 0.67, 0.88, 0.97].filter((share) => uniform >= share).length
}

/** Log rent of a two-room lease of 2017, a smooth surface over kilometres east and north. */
function rentTrend(east: number, north: number): number {
  const fromQuay = Math.sqrt((east - 0.5) ** 2 + (north + 3) ** 2 + 4)
  return 6.55 - 0.035 * fromQuay + 0.07 * Math.sin(east / 2.2 + 0.4) * Math.cos(north / 2.6) + 0.012 * north
}

/** 1 at the middle, falling smoothly to 0 at the reach. */
function bump(distanceMetres: number): number {
  const share = distanceMetres / BANK_REACH_METRES
  return share >= 1 ? 0 : (1 - share * share) ** 2
}

/** Point in ring by counting crossings to the east. */
export function isInside(ring: readonly LonLat[], [lon, lat]: LonLat): boolean {
  let inside = false
  for (let at = 1; at < ring.length; at++) {
    const [lonA, latA] = ring[at - 1]
    const [lonB, latB] = ring[at]
    if (latA > lat !== latB > lat && lon < lonA + ((lat - latA) / (latB - latA)) * (lonB - lonA)) inside = !inside
  }
  return inside
}
