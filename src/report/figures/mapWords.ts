/** What the map of the border says in words, and its numbers. */
import { extent } from 'd3-array'
import type { Jump, MapExhibit } from '../../results.js'
import { linePlaces } from '../lineTable.js'
import { fixed, significant } from '../numbers.js'
import { isEstimated, type OutcomeView } from '../view.js'
import type { FigureData } from './figure.js'

export type Piece = MapExhibit['pieces'][number]

const kilometres = (pieces: readonly Piece[]) => pieces.reduce((sum, piece) => sum + piece.lengthMetres, 0) / 1000

export function mapTitle(map: MapExhibit, outcome: OutcomeView, estimates: ReadonlyMap<string, number>): string {
  const aside = map.pieces.filter((piece) => piece.line === null)
  const [low, high] = extent([...estimates.values()])
  const places = linePlaces(outcome)
  const seen =
    low === undefined
      ? `No piece has an estimate of the jump in ${outcome.result.outcome}`
      : `The jump in ${outcome.result.outcome} runs from ${fixed(low, places)} to ${fixed(high, places)} over ${estimates.size} pieces of border`
  const left =
    aside.length === 0
      ? ''
      : `; ${aside.length} of ${map.pieces.length} pieces ${aside.length === 1 ? 'is' : 'are'} set aside`
  return `${seen}${left}`
}

export function mapCaption(map: MapExhibit, outcome: OutcomeView): string {
  const used = map.pieces.filter((piece) => piece.line !== null)
  const aside = map.pieces.filter((piece) => piece.line === null)
  const lost = aside.length === 0 ? '' : `; dashed: ${aside.length} set aside (${significant(kilometres(aside))} km)`
  return `Border pieces on the ground: ${used.length} in use (${significant(kilometres(used))} km)${lost}. Treated zones are hatched. Light and dark follow the corrected estimates of the jump in ${outcome.result.outcome}; noisy pieces look extreme by chance, so read the map with the intervals. No unit is drawn.`
}

export function mapData(map: MapExhibit, { result }: OutcomeView): FigureData {
  const jumps = new Map(result.lines.map((line) => [line.line, line]))
  return {
    columns: ['line', 'zone_untreated', 'zone_treated', 'piece', 'length_m', 'set_aside', 'estimate', 'low', 'high'],
    rows: map.pieces.map((piece) => {
      const jump = piece.line === null ? undefined : jumps.get(piece.line)
      const corrected = jump && isEstimated<Jump & { line: string }>(jump) ? jump.corrected : undefined
      const [untreated, treated] = piece.zones
      return [
        piece.line,
        untreated,
        treated,
        piece.piece,
        piece.lengthMetres,
        piece.line === null ? (piece.setAside ?? 'not used') : null,
        corrected?.estimate,
        corrected?.low,
        corrected?.high,
      ]
    }),
  }
}

export function describeMap(map: MapExhibit, outcome: OutcomeView, estimated: number): string {
  const used = map.pieces.filter((piece) => piece.line !== null).length
  const treated = map.zones.filter((zone) => zone.treated).map((zone) => zone.name)
  return `Map of ${map.zones.length} zones, ${treated.length} of them treated, and ${map.pieces.length} border pieces: ${used} used, ${map.pieces.length - used} set aside, ${estimated} with an estimate of the jump in ${outcome.result.outcome}. The table of lines gives every number.`
}
