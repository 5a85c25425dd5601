/** What else changes here: layers whose own lines also run along the border. */
import type { LayerShare } from './eligible.js'
import type { Piece } from './pieces.js'

/** Shares in the order of the layers. */
export interface LayersAlong {
  readonly layers: readonly string[]
  /** Of all the border in use, by length. */
  readonly whole: { readonly km: number; readonly shares: readonly number[] }
  readonly pairs: readonly {
    readonly zones: readonly [untreated: string, treated: string]
    readonly km: number
    readonly shares: readonly number[]
  }[]
}

/**
 * Share of length near each layer, by pair of zones and over all, of the pieces that are not set aside. `pieces` in the
 * order of the layers' shares. Shares are NaN where nothing is left.
 */
export function layersAlong(pieces: readonly Piece[], layers: readonly LayerShare[]): LayersAlong {
  const used = pieces.map((_, p) => p).filter((p) => pieces[p].setAside === undefined)
  const sharesOf = (own: readonly number[]) => {
    const metres = own.reduce((sum, p) => sum + pieces[p].lengthMetres, 0)
    const near = ({ share }: LayerShare) => own.reduce((sum, p) => sum + share[p] * pieces[p].lengthMetres, 0)
    return { km: metres / 1000, shares: layers.map((layer) => near(layer) / metres) }
  }
  const byPair = new Map<string, number[]>()
  for (const p of used) {
    const key = JSON.stringify(pieces[p].zones)
    const list = byPair.get(key)
    if (list) list.push(p)
    else byPair.set(key, [p])
  }
  return {
    layers: layers.map(({ name }) => name),
    whole: sharesOf(used),
    pairs: [...byPair.values()].map((own) => ({ zones: pieces[own[0]].zones, ...sharesOf(own) })),
  }
}
