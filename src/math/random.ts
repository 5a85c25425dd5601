/**
 * Seeded random numbers: xoshiro128** (Blackman & Vigna 2021, ACM TOMS 47), 128 bits of state, period 2¹²⁸ − 1.
 * The same seed gives the same numbers on every machine. Not for secrets.
 */
import { normalQuantile } from './normal.js'

export interface Random {
  /** Uniform on [0, 1), a multiple of 2⁻⁵³. */
  next(): number
  /** Standard normal, by inversion of one uniform draw symmetric about 0. */
  normal(): number
  /** Uniform whole number 0 … n − 1, for 1 ≤ n ≤ 2⁵³; without bias. */
  integer(n: number): number
}

/** Generator for a seed, any finite number; different seeds give unrelated sequences. */
export function seededRandom(seed: number): Random {
  return generatorFrom(mixedState([...halves(seed), 0, 0, 0]))
}

/**
 * The k-th stream of a seed, k = 0, 1, 2, …: unrelated to the other streams and to seededRandom(seed). One stream
 * for each replicate keeps results the same in whatever order or on however many workers the replicates run.
 */
export function streamOf(seed: number, k: number): Random {
  if (!(Number.isSafeInteger(k) && k >= 0)) throw new RangeError(`a stream is numbered 0, 1, 2, …, not ${k}`)
  return generatorFrom(mixedState([...halves(seed), k >>> 0, Math.floor(k / 2 ** 32), 1]))
}

function halves(seed: number): [number, number] {
  if (!Number.isFinite(seed)) throw new RangeError(`a seed must be a finite number, not ${seed}`)
  const words = new Uint32Array(new Float64Array([seed + 0]).buffer)
  return [words[0], words[1]]
}

/** Four state words from the seed's words by the splitmix step with a 32-bit finaliser (Stafford's mix). */
function mixedState(words: readonly number[]): Uint32Array {
  let hash = 0x9e3779b9
  const state = new Uint32Array(4)
  for (const word of words) hash = finalised((hash ^ word) + 0x9e3779b9)
  for (let i = 0; i < 4; i++) {
    let mixed = hash + Math.imul(i + 1, 0x85ebca6b)
    for (const word of words) mixed = finalised((mixed ^ word) + 0x9e3779b9)
    state[i] = mixed
  }
  if ((state[0] | state[1] | state[2] | state[3]) === 0) state[0] = 1
  return state
}

function finalised(z: number): number {
  z = Math.imul(z ^ (z >>> 16), 0x21f0aaad)
  z = Math.imul(z ^ (z >>> 15), 0x735a2d97)
  return z ^ (z >>> 15)
}

/** Generator from four state words, not all zero. */
export function generatorFrom(state: Uint32Array): Random {
  let [a, b, c, d] = [state[0] | 0, state[1] | 0, state[2] | 0, state[3] | 0]
  const word = (): number => {
    const scrambled = Math.imul(b, 5)
    const result = Math.imul((scrambled << 7) | (scrambled >>> 25), 9)
    const shifted = b << 9
    c ^= a
    d ^= b
    b ^= c
    a ^= d
    c ^= shifted
    d = (d << 11) | (d >>> 21)
    return result >>> 0
  }
  const next = (): number => {
    const high = word() >>> 5
    return (high * 67108864 + (word() >>> 6)) / 9007199254740992
  }
  return {
    next,
    normal() {
      const draw = next() * 2
      const half = draw < 1 ? draw : draw - 1
      const z = normalQuantile((half + 2 ** -53) / 2)
      return draw < 1 ? z : -z
    },
    integer(n) {
      if (!(Number.isSafeInteger(n) && n >= 1)) throw new RangeError(`a draw needs a whole number of choices, not ${n}`)
      const whole = 2 ** 53
      const limit = whole - (whole % n)
      for (;;) {
        const draw = next() * whole
        if (draw < limit) return draw % n
      }
    },
  }
}
