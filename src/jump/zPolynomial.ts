/** Polynomials in z on [−1, 1] as coefficients of 1, z, z², …, and the change to and from Legendre polynomials. */

/** Row j: coefficients of the Legendre polynomial P_j in powers of z (DLMF 18.9.1), side order+1, row-major. */
function makeCoefficients(order: number): Float64Array {
  const size = order + 1
  const rows = new Float64Array(size * size)
  rows[0] = 1
  if (order > 0) rows[size + 1] = 1
  for (let j = 2; j <= order; j++) {
    for (let power = 0; power <= j; power++) {
      const raised = power > 0 ? (2 * j - 1) * rows[(j - 1) * size + power - 1] : 0
      rows[j * size + power] = (raised - (j - 1) * rows[(j - 2) * size + power]) / j
    }
  }
  return rows
}

/** Of the orders that fits have, made once. */
const coefficients = Array.from({ length: 12 }, (_, order) => makeCoefficients(order))

function legendreCoefficients(order: number): Float64Array {
  return coefficients[order] ?? makeCoefficients(order)
}

/** From sums against powers, Σ f z^j, to sums against Legendre polynomials, Σ f P_j. */
export function inLegendre(againstPowers: Float64Array, order: number): Float64Array {
  const size = order + 1
  const rows = legendreCoefficients(order)
  const out = new Float64Array(size)
  for (let j = 0; j < size; j++) {
    for (let power = 0; power <= j; power++) out[j] += rows[j * size + power] * againstPowers[power]
  }
  return out
}

/** From Legendre coefficients to coefficients of powers. */
export function legendreInZ(coefficients: Float64Array): Float64Array {
  const size = coefficients.length
  const rows = legendreCoefficients(size - 1)
  const out = new Float64Array(size)
  for (let j = 0; j < size; j++) {
    for (let power = 0; power <= j; power++) out[power] += coefficients[j] * rows[j * size + power]
  }
  return out
}

/** Coefficient of t^power in each Legendre polynomial of z = 2t/scale − 1. */
export function powerOfT(power: number, order: number, scale: number): Float64Array {
  const size = order + 1
  const rows = legendreCoefficients(order)
  const out = new Float64Array(size)
  const unscale = (2 / scale) ** power
  for (let j = power; j < size; j++) {
    let choose = 1
    for (let k = power; k <= j; k++) {
      out[j] += rows[j * size + k] * choose * ((k - power) % 2 === 0 ? 1 : -1)
      choose = (choose * (k + 1)) / (k + 1 - power)
    }
    out[j] *= unscale
  }
  return out
}

export function evaluate(polynomial: Float64Array, z: number): number {
  let value = polynomial[polynomial.length - 1]
  for (let j = polynomial.length - 2; j >= 0; j--) value = value * z + polynomial[j]
  return value
}
