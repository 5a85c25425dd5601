/** Ready-made signed distances as a placement. */
import type { Line, Placement, SetAside } from '../placement.js'
import { groupRows, type Labels, lineLabel } from './labels.js'

export interface DistanceInput {
  /** Signed distance of each row, positive where treated; NaN = missing. */
  readonly distance: Float64Array
  /** Which line each row belongs to; absent: one line named 'all'. */
  readonly name?: Labels
}

/**
 * Places each row at the distance given. A row exactly on the line has no side and is set aside, as are rows without
 * a finite distance or without a line. Lines are sorted: by number where all names are numbers, else by code unit.
 */
export function placeByDistance(input: DistanceInput): { placement: Placement; setAside: SetAside } {
  const { distance, name } = input
  const count = distance.length
  if (name && name.codes.length !== count) {
    throw new RangeError(`column ${name.name} has ${name.codes.length} rows, the distance has ${count}`)
  }
  const groups = name && groupRows([name])
  const lines: Line[] = groups
    ? groups.values.map((values) => ({ id: values[0], label: lineLabel([name.name], values) }))
    : [{ id: 'all', label: 'all units' }]
  const unit = new Int32Array(count)
  const line = new Int32Array(count)
  const x = new Float64Array(count)
  const treated = new Uint8Array(count)
  const setAside = new Map<string, number>()
  let size = 0
  for (let i = 0; i < count; i++) {
    const group = groups ? groups.ofRow[i] : 0
    const reason = reasonAgainst(distance[i], group)
    if (reason !== undefined) {
      setAside.set(reason, (setAside.get(reason) ?? 0) + 1)
      continue
    }
    unit[size] = i
    line[size] = group
    x[size] = distance[i]
    treated[size++] = distance[i] > 0 ? 1 : 0
  }
  return {
    placement: {
      lines,
      unit: unit.slice(0, size),
      line: line.slice(0, size),
      x: x.slice(0, size),
      treated: treated.slice(0, size),
    },
    setAside,
  }
}

function reasonAgainst(distance: number, group: number): string | undefined {
  if (Number.isNaN(distance)) return 'distance missing'
  if (!Number.isFinite(distance)) return 'distance not finite'
  if (distance === 0) return 'exactly on the line'
  if (group < 0) return 'name of the line missing'
  return undefined
}
