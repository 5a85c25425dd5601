/** Extremes of the positions of a layer, in whatever coordinates they are. */

export interface Extent {
  readonly minX: number
  readonly minY: number
  readonly maxX: number
  readonly maxY: number
  /** Positions seen. */
  readonly positions: number
  /** The first position that is no longitude and latitude, and its feature; longitudes to ±360 pass. */
  readonly strange?: { readonly x: number; readonly y: number; readonly feature: number; readonly others: number }
}

/** Positions are arrays that begin with two numbers, at any depth; whatever else a file holds is passed over. */
export function eachPosition(coordinates: unknown, see: (x: number, y: number) => void): void {
  if (!Array.isArray(coordinates)) return
  if (typeof coordinates[0] === 'number') {
    if (typeof coordinates[1] === 'number') see(coordinates[0], coordinates[1])
  } else for (const part of coordinates) eachPosition(part, see)
}

/** The positions of a geometry, of whatever kind. */
export function eachGeometryPosition(geometry: unknown, see: (x: number, y: number) => void): void {
  if (typeof geometry !== 'object' || geometry === null) return
  const { coordinates, geometries } = geometry as { coordinates?: unknown; geometries?: unknown }
  eachPosition(coordinates, see)
  if (Array.isArray(geometries)) for (const part of geometries) eachGeometryPosition(part, see)
}

/** Undefined where there is no position at all. */
export function extentOf(features: readonly unknown[]): Extent | undefined {
  let [minX, minY, maxX, maxY] = [Infinity, Infinity, -Infinity, -Infinity]
  let [positions, strangers] = [0, 0]
  let strange: { x: number; y: number; feature: number } | undefined
  features.forEach((feature, index) => {
    eachGeometryPosition((feature as { geometry?: unknown } | null)?.geometry, (x, y) => {
      positions++
      if (x < minX) minX = x
      if (x > maxX) maxX = x
      if (y < minY) minY = y
      if (y > maxY) maxY = y
      if (Math.abs(x) <= 360 && Math.abs(y) <= 90) return
      strangers++
      strange ??= { x, y, feature: index }
    })
  })
  if (positions === 0) return undefined
  return { minX, minY, maxX, maxY, positions, strange: strange && { ...strange, others: strangers - 1 } }
}
