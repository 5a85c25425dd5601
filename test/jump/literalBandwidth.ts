/**
 * The bandwidth of METHODS section 5 written out word by word, slowly: signed x, dense matrices, one function a line.
 * Nothing of src/ is used but ml-matrix's least squares is replaced by its own QR on scaled columns.
 */
import { Matrix, QrDecomposition } from 'ml-matrix'

export type KernelName = 'triangular' | 'epanechnikov' | 'uniform'

export interface Data {
  x: number[]
  y: number[]
  treated: boolean[]
  w?: number[]
  cluster?: number[]
}

const kernels: Record<KernelName, (u: number) => number> = {
  triangular: (u) => Math.max(0, 1 - Math.abs(u)),
  epanechnikov: (u) => 0.75 * Math.max(0, 1 - u * u),
  uniform: (u) => (Math.abs(u) <= 1 ? 0.5 : 0),
}

interface SideData {
  x: number[]
  y: number[]
  w: number[]
  sigma: number[]
  cluster: number[] | null
}

/** a_{ν,i} of every unit of the side, zero outside the window; h = null is the plain fit to the whole side. */
function weightsOf(side: SideData, nu: number, order: number, h: number | null, kernel: KernelName): number[] {
  const k = side.x.map((x, i) => side.w[i] * (h === null ? 1 : kernels[kernel](x / h) / h))
  const used = k.map((value, i) => (value > 0 ? i : -1)).filter((i) => i >= 0)
  const scale = Math.max(...used.map((i) => Math.abs(side.x[i])))
  const design = new Matrix(
    used.map((i) => Array.from({ length: order + 1 }, (_, j) => Math.sqrt(k[i]) * (side.x[i] / scale) ** j)),
  )
  // row ν of (X'X)^-1 X' = row ν of R^-1 Q'
  const qr = new QrDecomposition(design)
  const q = qr.orthogonalMatrix
  const r = qr.upperTriangularMatrix
  const e = Matrix.zeros(order + 1, 1)
  e.set(nu, 0, 1)
  // solve R' z = e, then a = Q z
  const z: number[] = []
  for (let i = 0; i <= order; i++) {
    let value = e.get(i, 0)
    for (let j = 0; j < i; j++) value -= r.get(j, i) * z[j]
    z.push(value / r.get(i, i))
  }
  const out = side.x.map(() => 0)
  used.forEach((i, row) => {
    let value = 0
    for (let j = 0; j <= order; j++) value += q.get(row, j) * z[j]
    out[i] = (value * Math.sqrt(k[i])) / scale ** nu
  })
  return out
}

/** Signed neighbour residuals by trying every other unit of the side. */
function neighbourResiduals(x: number[], y: number[]): number[] {
  return x.map((xi, i) => {
    const gaps = x.map((xj, j) => ({ j, gap: Math.abs(xj - xi) })).filter(({ j }) => j !== i)
    const sorted = gaps.map(({ gap }) => gap).sort((a, b) => a - b)
    const third = sorted[Math.min(3, sorted.length) - 1]
    const near = gaps.filter(({ gap }) => gap <= third)
    const mean = near.reduce((sum, { j }) => sum + y[j], 0) / near.length
    return Math.sqrt(near.length / (near.length + 1)) * (y[i] - mean)
  })
}

const dot = (a: number[], b: number[]) => a.reduce((sum, value, i) => sum + value * b[i], 0)

function spread(side: SideData, a: number[]): number {
  if (side.cluster === null)
    return dot(
      a.map((v) => v * v),
      side.sigma.map((v) => v * v),
    )
  const sums = new Map<number, number>()
  a.forEach((v, i) => {
    const g = (side.cluster as number[])[i]
    sums.set(g, (sums.get(g) ?? 0) + v * side.sigma[i])
  })
  return [...sums.values()].reduce((sum, v) => sum + v * v, 0)
}

function quantile(sorted: number[], p: number): number {
  const at = (sorted.length - 1) * p
  const low = Math.floor(at)
  return sorted[low] + (at - low) * ((sorted[low + 1] ?? sorted[low]) - sorted[low])
}

export function literalBandwidths(
  data: Data,
  p: number,
  kernel: KernelName,
  rule: 'mse' | 'coverage',
): { h: number; b: number; separate: { h: [number, number]; b: [number, number] } } {
  const n = data.x.length
  const q = p + 1
  const sides: SideData[] = [false, true].map((treated) => {
    const index = data.x.map((_, i) => i).filter((i) => data.treated[i] === treated)
    const x = index.map((i) => data.x[i])
    const y = index.map((i) => data.y[i])
    return {
      x,
      y,
      w: index.map((i) => data.w?.[i] ?? 1),
      sigma: neighbourResiduals(x, y),
      cluster: data.cluster ? index.map((i) => (data.cluster as number[])[i]) : null,
    }
  })
  const sgn = [-1, 1]
  const sortedX = [...data.x].sort((a, b) => a - b)
  const mean = data.x.reduce((sum, v) => sum + v, 0) / n
  const sd = Math.sqrt(data.x.reduce((sum, v) => sum + (v - mean) ** 2, 0) / (n - 1))
  const iqr = quantile(sortedX, 0.75) - quantile(sortedX, 0.25)
  const constant = { triangular: 2.576, epanechnikov: 2.34, uniform: 1.843 }[kernel]
  const aMin =
    Math.max(
      ...sides.map(({ x }) => {
        const t = x.map(Math.abs).sort((a, b) => a - b)
        return t[Math.min(20 + p, t.length) - 1]
      }),
    ) *
    (1 + 1e-9)
  const aMax = Math.max(...data.x.map(Math.abs))
  const keep = (value: number) => Math.min(Math.max(value, aMin), aMax)
  const a0 = keep(constant * (iqr > 0 ? Math.min(sd, iqr / 1.349) : sd) * n ** -0.2)

  const response = (side: SideData, nu: number, rho: number, a: number) =>
    dot(
      weightsOf(side, nu, rho, a, kernel),
      side.x.map((x) => x ** (rho + 1)),
    )
  const coefficient = (side: SideData, nu: number, order: number, a: number | null) => {
    const weights = weightsOf(side, nu, order, a, kernel)
    return { g: dot(weights, side.y), v: spread(side, weights) }
  }
  const run = (which: number[]) => {
    const stage = (nu: number, rho: number, a: number, g: number[], v: number[], s: number[]) => {
      let B = 0
      let R = 0
      let V = 0
      for (const k of which) {
        const weights = weightsOf(sides[k], nu, rho, a, kernel)
        const c = dot(
          weights,
          sides[k].x.map((x) => x ** (rho + 1)),
        )
        B += sgn[k] * s[k] * c * g[k]
        R += (s[k] * c) ** 2 * v[k]
        V += s[k] ** 2 * spread(sides[k], weights)
      }
      const e = rho + 1 - nu
      return keep(
        (((2 * nu + 1) * V * a ** (2 * nu + 1)) / ((2 * e * (B ** 2 + 3 * R)) / a ** (2 * e))) ** (1 / (2 * rho + 3)),
      )
    }
    const cp = sides.map((side) => response(side, 0, p, a0))
    const cq = sides.map((side) => response(side, p + 1, q, a0))
    const first = sides.map((side) => coefficient(side, q + 2, q + 2, null))
    const d = stage(
      q + 1,
      q + 1,
      a0,
      first.map(({ g }) => g),
      first.map(({ v }) => v),
      cp.map((c, k) => c * cq[k]),
    )
    const second = sides.map((side) => coefficient(side, q + 1, q + 1, d))
    const b = stage(
      p + 1,
      q,
      a0,
      second.map(({ g }) => g),
      second.map(({ v }) => v),
      cp,
    )
    const third = sides.map((side) => coefficient(side, p + 1, q, b))
    const h = stage(
      0,
      p,
      a0,
      third.map(({ g }) => g),
      third.map(({ v }) => v),
      [1, 1],
    )
    return { h: rule === 'mse' ? h : keep(h * n ** (-p / ((2 * p + 3) * (p + 3)))), b }
  }
  const common = run([0, 1])
  const left = run([0])
  const right = run([1])
  return { ...common, separate: { h: [left.h, right.h], b: [left.b, right.b] } }
}
