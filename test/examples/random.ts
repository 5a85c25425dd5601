/** Seeded draws for the example studies: the same seed gives the same files on every machine. */
export interface Draws {
  /** In [0, 1). */
  uniform(): number
  /** Standard normal. */
  normal(): number
  /** A whole number from low to high, both included. */
  whole(low: number, high: number): number
}

/** A 32-bit counter passed through two rounds of multiply and shift; period 2^32, enough for some 10^6 draws. */
export function drawsFrom(seed: number): Draws {
  let state = seed >>> 0
  const uniform = () => {
    state = (state + 0x9e3779b9) >>> 0
    let bits = state
    bits = Math.imul(bits ^ (bits >>> 16), 0x85ebca6b)
    bits = Math.imul(bits ^ (bits >>> 13), 0xc2b2ae35)
    return ((bits ^ (bits >>> 16)) >>> 0) / 2 ** 32
  }
  const normal = () => {
    for (;;) {
      const a = 2 * uniform() - 1
      const b = 2 * uniform() - 1
      const square = a * a + b * b
      if (square > 0 && square < 1) return a * Math.sqrt((-2 * Math.log(square)) / square)
    }
  }
  return { uniform, normal, whole: (low, high) => low + Math.floor(uniform() * (high - low + 1)) }
}
