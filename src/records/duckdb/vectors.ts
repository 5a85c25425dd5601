import type { DuckDBDataChunk } from '@duckdb/node-api'

/**
 * The memory of a chunk's column, read in place. The package types these fields as private; reading a value at a time
 * through its methods takes several times as long.
 */
interface RawVector {
  readonly items: Float64Array | Uint8Array | BigUint64Array
  readonly dataView: DataView
}

function rawVector(chunk: DuckDBDataChunk, column: number): RawVector {
  return chunk.getColumnVector(column) as unknown as RawVector
}

/** A DOUBLE column without NULL. */
export function doublesOf(chunk: DuckDBDataChunk, column: number): Float64Array {
  const { items } = rawVector(chunk, column)
  if (!(items instanceof Float64Array)) throw new TypeError(`column ${column} of the chunk is not DOUBLE`)
  return items
}

/** A UTINYINT column without NULL. */
export function bytesOf(chunk: DuckDBDataChunk, column: number): Uint8Array {
  const { items } = rawVector(chunk, column)
  if (!(items instanceof Uint8Array)) throw new TypeError(`column ${column} of the chunk is not UTINYINT`)
  return items
}

/** A UBIGINT column without NULL, as two words a row, low first. */
export function wordPairsOf(chunk: DuckDBDataChunk, column: number): Uint32Array {
  const { items } = rawVector(chunk, column)
  if (!(items instanceof BigUint64Array)) throw new TypeError(`column ${column} of the chunk is not UBIGINT`)
  return new Uint32Array(items.buffer, items.byteOffset, items.length * 2)
}

/**
 * A VARCHAR column without NULL, four words a row: the length in bytes, then up to 12 bytes of UTF-8 padded with zeros,
 * or, for longer texts, the first 4 bytes and an address.
 */
export function textWordsOf(chunk: DuckDBDataChunk, column: number): Uint32Array {
  const { dataView } = rawVector(chunk, column)
  if (!(dataView instanceof DataView)) throw new TypeError(`column ${column} of the chunk is not VARCHAR`)
  return new Uint32Array(dataView.buffer, dataView.byteOffset, dataView.byteLength / 4)
}

/** One text of a VARCHAR column. */
export function textAt(chunk: DuckDBDataChunk, column: number, row: number): string {
  return chunk.getColumnVector(column).getItem(row) as string
}
