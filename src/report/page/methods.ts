/** The methods this run used, each in a line or two with its papers; nothing that was not used. */
import type { Jump } from '../../results.js'
import { estimatedLines, isEstimated, type View } from '../view.js'

export interface Method {
  readonly text: string
  readonly papers: readonly string[]
}

const papers = {
  fits: 'Fan & Gijbels 1996, Local Polynomial Modelling and Its Applications',
  correction: 'Calonico, Cattaneo & Titiunik 2014, Econometrica',
  bandwidth: 'Imbens & Kalyanaraman 2012, Review of Economic Studies',
  coverage2018: 'Calonico, Cattaneo & Farrell 2018, Journal of the American Statistical Association',
  coverage2020: 'Calonico, Cattaneo & Farrell 2020, Econometrics Journal',
  robust: 'MacKinnon & White 1985, Journal of Econometrics',
  neighbours: 'Abadie & Imbens 2006, Econometrica',
  freedom: 'Satterthwaite 1946, Biometrics',
  freedomSmall: 'Imbens & Kolesár 2016, Review of Economics and Statistics',
  pool: 'Cattaneo, Keele, Titiunik & Vazquez-Bare 2016, Journal of Politics',
  fixed: 'Black 1999, Quarterly Journal of Economics',
  covariates: 'Calonico, Cattaneo, Farrell & Titiunik 2019, Review of Economics and Statistics',
  target: 'Bertanha 2020, Journal of Econometrics',
  random: 'DerSimonian & Laird 1986, Controlled Clinical Trials',
  welch: 'Welch 1951, Biometrika',
  density: 'Cattaneo, Jansson & Ma 2020, Journal of the American Statistical Association',
  binned: 'McCrary 2008, Journal of Econometrics',
  discrete: 'Frandsen 2017, Advances in Econometrics',
  joint: 'Hotelling 1931, Annals of Mathematical Statistics',
  window: 'Cattaneo, Frandsen & Titiunik 2015, Journal of Causal Inference',
  holm: 'Holm 1979, Scandinavian Journal of Statistics',
  hochberg: 'Benjamini & Hochberg 1995, Journal of the Royal Statistical Society B',
  moran: 'Moran 1950, Biometrika',
  hartung: 'Knapp & Hartung 2003, Statistics in Medicine',
  spatial: 'Conley 1999, Journal of Econometrics',
  reduced: 'Bell & McCaffrey 2002, Survey Methodology',
  reducedFreedom: 'Pustejovsky & Tipton 2018, Journal of Business & Economic Statistics',
  geodesic: 'Karney 2013, Journal of Geodesy',
} as const

export function methodsOf(view: View): Method[] {
  const jumps = view.outcomes.flatMap(({ result }) => [
    ...estimatedLines(result),
    ...(isEstimated<Jump & { weights: Readonly<Record<string, number>> }>(result.pooled) ? [result.pooled] : []),
  ])
  if (jumps.length === 0) return placing(view)
  const variances = new Set(jumps.map((jump) => jump.variance))
  return [
    ...placing(view),
    ...fitting(view, jumps[0]),
    ...[...variances].map((variance) => varianceMethod(variance)),
    ...reference(view, variances),
    ...together(view),
    ...checking(view),
  ]
}

function placing(view: View): Method[] {
  if (view.words.isBorder) {
    return [
      {
        text: 'Distance is geodesic, on the WGS 84 ellipsoid, to the nearest point of the border between a treated and an untreated zone; treated units have positive distance.',
        papers: [papers.geodesic],
      },
    ]
  }
  return [
    {
      text: `Each unit has its signed distance from ${view.words.theLine} it faces, positive on the treated side.`,
      papers: [],
    },
  ]
}

function fitting(view: View, jump: Jump): Method[] {
  const isCoverage = view.choices.bandwidth === 'coverage'
  const isRule = isCoverage || view.choices.bandwidth === 'mse'
  return [
    {
      text: `Plain: a local polynomial of order ${jump.order} on each side (${jump.kernel} kernel), the jump being the difference of the two fits at ${view.words.theLine}.`,
      papers: [papers.fits],
    },
    {
      text: 'Corrected: the plain jump less an estimate of its smoothing bias, with a standard error that allows for estimating that bias.',
      papers: [papers.correction],
    },
    isRule
      ? {
          text: isCoverage
            ? 'Bandwidth: the plug-in of smallest mean squared error, shrunk so that intervals cover best.'
            : 'Bandwidth: a plug-in that aims at the smallest mean squared error of the plain jump, with a regularised bias term.',
          papers: isCoverage
            ? [papers.bandwidth, papers.correction, papers.coverage2018, papers.coverage2020]
            : [papers.bandwidth, papers.correction],
        }
      : { text: 'Bandwidth: fixed by the study.', papers: [] },
    ...(view.choices.donut > 0
      ? [{ text: `Units closer than ${view.choices.donut} to ${view.words.theLine} were left out.`, papers: [] }]
      : []),
  ]
}

function varianceMethod(variance: string): Method {
  if (/^hc[0-3]$/.test(variance)) {
    return { text: `Variance ${variance}: squared residuals, robust to unequal variances.`, papers: [papers.robust] }
  }
  if (variance === 'neighbours') {
    return {
      text: 'Variance neighbours: each unit against its nearest three on the same side.',
      papers: [papers.neighbours],
    }
  }
  if (variance === 'spatial')
    return {
      text: 'Variance spatial: units nearer to each other than the study’s cutoff may depend on each other, less the farther apart.',
      papers: [papers.spatial],
    }
  if (variance === 'few-clusters')
    return {
      text: 'Variance few-clusters: clustered, with the bias-reduced matrix and its degrees of freedom, for few or unequal clusters.',
      papers: [papers.reduced, papers.reducedFreedom],
    }
  return {
    text: `Variance ${variance}: units of one cluster may depend on each other, on both sides of the line.`,
    papers: [],
  }
}

function reference(view: View, variances: ReadonlySet<string>): Method[] {
  if (view.choices.reference === 'normal')
    return [{ text: 'Intervals and p-values use the normal distribution.', papers: [] }]
  const isUnclustered = [...variances].some((variance) => /^(hc[0-3]|neighbours|spatial)$/.test(variance))
  const isClustered = variances.has('clusters')
  return [
    ...(isUnclustered
      ? [
          {
            text: 'Intervals and p-values use t with the degrees of freedom of the weights that make the estimate.',
            papers: [papers.freedom, papers.freedomSmall],
          },
        ]
      : []),
    ...(isClustered ? [{ text: 'With clusters, t with one degree of freedom fewer than clusters.', papers: [] }] : []),
  ]
}

function together(view: View): Method[] {
  const results = view.outcomes.map(({ result }) => result)
  const isPooled = results.some((result) => isEstimated(result.pooled)) && view.results.lines.length > 1
  return [
    ...(isPooled
      ? [
          {
            text: `Pooled: all units on one distance from their own ${view.words.line}, with one bandwidth.`,
            papers: [papers.pool],
          },
          ...(view.choices.fixedEffects
            ? [
                {
                  text: `A fixed effect for each ${view.words.line} takes out differences of level.`,
                  papers: [papers.fixed, papers.covariates],
                },
              ]
            : []),
        ]
      : []),
    ...(results.some((result) => isEstimated(result.target))
      ? [{ text: 'Target: the average of line-by-line estimates under stated weights.', papers: [papers.target] }]
      : []),
    ...(results.some((result) => result.comparison !== null)
      ? [
          {
            text: 'Comparison: Wald test of equal effects with the covariances between lines; random effects with the Knapp–Hartung interval.',
            papers: [papers.random, papers.hartung],
          },
        ]
      : []),
  ]
}

/** The tests behind the checks, where they could be made. */
function checking(view: View): Method[] {
  const results = view.outcomes.map(({ result }) => result)
  const made = results.flatMap(({ checks }) => checks.filter(({ verdict }) => verdict !== 'not possible'))
  const hasWelch = results.some(({ comparison }) => comparison?.welch)
  const has = (name: string) => made.some(({ check }) => check === name)
  const isDiscrete = made.some(({ check, says }) => check.startsWith('density') && says.startsWith('the score has few'))
  const all: [boolean, string, readonly string[]][] = [
    [
      hasWelch,
      'Equal effects are tested by Welch’s F too, which allows for each line’s degrees of freedom.',
      [papers.welch],
    ],
    [
      has('density') || has('units per km²'),
      'Density at the line: polynomials fitted to the empirical distribution function on each side.',
      [papers.density],
    ],
    [
      has('density, binned'),
      'Density in bins: local linear fits to a histogram that no bin of which straddles the line.',
      [papers.binned],
    ],
    [isDiscrete, 'Density of a score with few values: counts at the values next to the line.', [papers.discrete]],
    [
      has('balance, joint'),
      'Predetermined columns jointly: Hotelling’s test with the covariance from influence values.',
      [papers.joint],
    ],
    [
      has('window randomisation'),
      'Window randomisation: Fisher’s test by seeded permutations in a window with balanced predetermined columns.',
      [papers.window],
    ],
    [has('spatial correlation'), 'Spatial correlation: Moran’s I of the residuals near the line.', [papers.moran]],
    [
      made.some(({ p_holm: p }) => p !== undefined),
      'Tests of one kind are adjusted for their number, by Holm in the verdicts; checks.csv has Benjamini & Hochberg’s beside.',
      [papers.holm, papers.hochberg],
    ],
  ]
  return all.filter(([used]) => used).map(([, text, sources]) => ({ text, papers: sources }))
}
