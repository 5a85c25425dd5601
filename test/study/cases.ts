/** Study files as data: good ones with a part of the study they give, bad ones with every problem they must name. */

export interface GoodCase {
  readonly name: string
  readonly text: string
  readonly gives: object
}

export interface BadCase {
  readonly name: string
  readonly text: string
  /** `LINE: what: found; todo`, all of them, in order. */
  readonly problems: readonly string[]
}

const score = `records:
  file: rows.csv
outcomes: [y]
line:
  score: s
  cutoff: 10
  treated: below
`
const border = `records:
  file: rows.csv
  position: [lon, lat]
outcomes: [y]
line:
  zones: zones.geojson
  treated: [Inner]
`
const distance = `records: {file: rows.csv}
outcomes: [y]
line: {distance: d}
`

export const goodCases: readonly GoodCase[] = [
  {
    name: 'a score line, nothing but what is required',
    text: score,
    gives: {
      title: 'tidemark',
      records: { file: 'rows.csv' },
      outcomes: ['y'],
      line: { kind: 'score', score: 's', cutoff: { kind: 'value', value: 10 }, treated: 'below', rescale: 'none' },
      estimation: {
        order: 1,
        kernel: 'triangular',
        bandwidth: { kind: 'rule', rule: 'mse' },
        sides: 'common',
        interval: 'auto',
        reference: 't',
        donut: 0,
        level: 0.95,
      },
      pooling: { fixedEffects: false, target: 'units' },
      checks: 'standard',
      disclosure: { coordinates: false, smallestCell: 10 },
      seed: 1,
    },
  },
  {
    name: 'a border, nothing but what is required',
    text: border,
    gives: {
      records: { file: 'rows.csv', position: ['lon', 'lat'] },
      line: {
        kind: 'border',
        zones: { file: 'zones.geojson' },
        zoneName: 'name',
        treated: ['Inner'],
        unit: 'm',
        snap: 2,
        piece: 1000,
        barriers: [],
      },
      pooling: { fixedEffects: true, target: 'units' },
    },
  },
  { name: 'ready-made distances', text: distance, gives: { line: { kind: 'distance', distance: 'd', pieces: false } } },
  {
    name: 'distances by line',
    text: distance.replace('d}', 'd, name: piece}'),
    gives: {
      line: { kind: 'distance', distance: 'd', name: 'piece', pieces: false },
      pooling: { fixedEffects: false, target: 'units' },
    },
  },
  {
    name: 'distances to the pieces of a border, clustered by piece',
    text: `${distance.replace('d}', 'd, name: piece, pieces: true}')}estimation: {variance: few-clusters}\n`,
    gives: {
      line: { kind: 'distance', distance: 'd', name: 'piece', pieces: true },
    },
  },
  {
    name: 'every key of a score line',
    text: `title: Bursary marks
records: {file: rows.parquet, id: pupil, keep: "year > 2 and s <> 0", weight: share, cluster: school}
outcomes: [y, z]
line:
  score: s
  cutoff: {schedule: cutoffs.csv, by: [year, region], value: cutoff}
  treated: at-or-above
  compare_by: [region]
  rescale: spread
estimation:
  order: 2
  kernel: epanechnikov
  bandwidth: {untreated: 8, treated: 6.5, bias: 12}
  sides: separate
  interval: corrected
  smoothness: rule
  variance: clusters
  reference: normal
  donut: 0.5
  level: 0.9
pooling: {fixed_effects: true, target: {column: residents}}
checks: none
disclosure: {coordinates: true, smallest_cell: 3}
seed: 0
`,
    gives: {
      title: 'Bursary marks',
      records: { file: 'rows.parquet', id: 'pupil', keep: 'year > 2 and s <> 0', weight: 'share', cluster: 'school' },
      outcomes: ['y', 'z'],
      line: {
        kind: 'score',
        score: 's',
        cutoff: { kind: 'schedule', file: 'cutoffs.csv', by: ['year', 'region'], value: 'cutoff' },
        treated: 'at-or-above',
        compareBy: ['region'],
        rescale: 'spread',
      },
      estimation: {
        order: 2,
        kernel: 'epanechnikov',
        bandwidth: { kind: 'fixed', untreated: 8, treated: 6.5, bias: 12 },
        sides: 'separate',
        interval: 'corrected',
        variance: 'clusters',
        reference: 'normal',
        donut: 0.5,
        level: 0.9,
      },
      pooling: { fixedEffects: true, target: { column: 'residents' } },
      disclosure: { coordinates: true, smallestCell: 3 },
      seed: 0,
    },
  },
  {
    name: 'every key of a border',
    text: `records: {file: homes.csv, position: [x, y]}
outcomes: [rent]
line:
  zones: zones.geojson
  zone_name: code
  treated: {property: levy, equals: true}
  outside: set-aside
  unit: km
  snap: 0.5
  piece: 2
  reach: 3.5
  barriers: [{file: river.geojson, within: 100}, {file: rail.geojson, within: 50}]
  overlaps: [{file: councils.geojson, within: 20}]
  along: 0.5
  side: zone_on_record
  on_conflict: map
  position_error: 5
  corner: 0.25
  largest_turn: 60
  repeated_points: {cap: 3}
estimation: {variance: clusters}
pooling: {fixed_effects: false}
`,
    gives: {
      line: {
        kind: 'border',
        zones: { file: 'zones.geojson' },
        zoneName: 'code',
        treated: { property: 'levy', equals: true },
        unit: 'km',
        snap: 0.5,
        piece: 2,
        reach: 3.5,
        barriers: [
          { file: 'river.geojson', within: 100 },
          { file: 'rail.geojson', within: 50 },
        ],
        overlaps: [{ file: 'councils.geojson', within: 20 }],
        along: 0.5,
        side: 'zone_on_record',
        onConflict: 'map',
        positionError: 5,
        corner: 0.25,
        largestTurn: 60,
        repeatedPoints: { cap: 3 },
      },
      estimation: { variance: 'clusters' },
      pooling: { fixedEffects: false },
    },
  },
  {
    name: 'shares from a file, by one column',
    text: `${score}pooling: {target: {shares: people.csv, line: 7, value: 2020}}\n`,
    gives: { pooling: { fixedEffects: false, target: { shares: 'people.csv', line: ['7'], value: '2020' } } },
  },
  {
    name: 'shares from a file, by two columns',
    text: `${score}pooling: {target: {shares: people.csv, line: [year, region], value: people}}\n`,
    gives: {
      pooling: { fixedEffects: false, target: { shares: 'people.csv', line: ['year', 'region'], value: 'people' } },
    },
  },
  {
    name: 'a border between doses',
    text: border.replace('treated: [Inner]', 'dose: levy_rate'),
    gives: { line: { kind: 'border', dose: 'levy_rate', outside: 'set-aside' } },
  },
  {
    name: 'GeoJSON points need no position',
    text: border.replace('rows.csv', 'rows.GeoJSON').replace('  position: [lon, lat]\n', ''),
    gives: { records: { file: 'rows.GeoJSON' } },
  },
  {
    name: 'zone and column names that look like numbers, as written',
    text: border.replace('[Inner]', '[0101, 2, 3.50]').replace('[y]', '[2010]'),
    gives: { line: { treated: ['0101', '2', '3.50'] }, outcomes: ['2010'] },
  },
  {
    name: 'a property equal to a number stays one',
    text: border.replace('[Inner]', '{property: p, equals: 3}'),
    gives: { line: { treated: { property: 'p', equals: 3 } } },
  },
  ...(
    [
      ['km', 1],
      ['ft', 3280.839895013123],
      ['mi', 0.621371192237334],
    ] as const
  ).map(([unit, piece]) => ({
    name: `a piece of 1000 metres in ${unit}`,
    text: `${border}  unit: ${unit}\n`,
    gives: { line: { unit, piece } },
  })),
  ...(
    [
      ['mse', { kind: 'rule', rule: 'mse' }],
      ['coverage', { kind: 'rule', rule: 'coverage' }],
      ['800', { kind: 'fixed', untreated: 800, treated: 800 }],
      ['{untreated: 800, treated: 600}', { kind: 'fixed', untreated: 800, treated: 600 }],
      ['{untreated: 8, treated: 8, bias: 9}', { kind: 'fixed', untreated: 8, treated: 8, bias: 9 }],
      ['{main: mse, bias: 1200}', { kind: 'rule', rule: 'mse', bias: 1200 }],
      ['{main: coverage, bias: 1.5}', { kind: 'rule', rule: 'coverage', bias: 1.5 }],
      ['{main: 1e2, bias: 150}', { kind: 'fixed', untreated: 100, treated: 100, bias: 150 }],
    ] as const
  ).map(([bandwidth, gives]) => ({
    name: `bandwidth ${bandwidth}`,
    text: `${score}estimation: {bandwidth: ${bandwidth}}\n`,
    gives: { estimation: { bandwidth: gives } },
  })),
  ...(
    [
      ['{column: c}', { kind: 'column', column: 'c' }],
      ['{schedule: c.csv, by: year, value: c}', { kind: 'schedule', file: 'c.csv', by: ['year'], value: 'c' }],
      ['{ladder: [20, 10, -5]}', { kind: 'ladder', steps: [-5, 10, 20] }],
      ['0', { kind: 'value', value: 0 }],
      ['-2.5e-3', { kind: 'value', value: -0.0025 }],
    ] as const
  ).map(([cutoff, gives]) => ({
    name: `cutoff ${cutoff}`,
    text: score.replace('cutoff: 10', `cutoff: ${cutoff}`),
    gives: { line: { cutoff: gives } },
  })),
  {
    name: 'compare_by as one name',
    text: `${score}  compare_by: region\n`,
    gives: { line: { compareBy: ['region'] } },
  },
  {
    name: 'JSON, indented by tabs',
    text: JSON.stringify(
      { records: { file: 'a.csv' }, outcomes: ['y'], line: { score: 's', cutoff: 1, treated: 'above' } },
      null,
      '\t',
    ),
    gives: { line: { treated: 'above' } },
  },
  {
    name: 'line ends of Windows, and a byte order mark',
    text: `\ufeff${score.replaceAll('\n', '\r\n')}`,
    gives: { line: { score: 's' } },
  },
  {
    name: 'an anchor and its alias',
    text: `records: {file: rows.csv, id: &u unit}\noutcomes: [*u, y]\nline: {distance: d}\n`,
    gives: { outcomes: ['unit', 'y'] },
  },
]

export const badCases: readonly BadCase[] = [
  {
    name: 'unknown keys at every depth, with the nearest known one',
    text: `tittle: A
records: {file: rows.csv, clusters: block}
outcomes: [y]
line:
  score: s
  cutoff: 10
  tretaed: below
  zzz: 1
estimation:
  fixedEffects: true
  bandwith: 3
  order: 2
pooling:
  level: 0.9
`,
    problems: [
      '1: tittle: not a known key; did you mean title?',
      '2: records.clusters: not a known key; did you mean cluster?',
      '7: line.tretaed: not a known key; did you mean treated?',
      '8: line.zzz: not a known key; known here: score, cutoff, treated, compare_by, rescale',
      '10: estimation.fixedEffects: not a known key here; it belongs to pooling',
      '11: estimation.bandwith: not a known key; did you mean bandwidth?',
      '14: pooling.level: not a known key here; it belongs to estimation',
    ],
  },
  {
    name: 'camel case is understood',
    text: `${score}pooling: {fixedEffects: true}\n`,
    problems: ['8: pooling.fixedEffects: not a known key; did you mean fixed_effects?'],
  },
  {
    name: 'a key of another form of line',
    text: `${border}  rescale: spread\n`,
    problems: ['8: line.rescale: not a known key here; it belongs to a score line'],
  },
  {
    name: 'missing keys',
    text: 'line:\n  score: s\n',
    problems: [
      '1: records: missing; write the keys of records indented under it',
      '1: outcomes: missing; write a list: [one, another]',
      '1: line.cutoff: missing; write a number',
      '1: line.treated: missing; write one of at-or-above, above, at-or-below, below',
    ],
  },
  {
    name: 'a border without its zones, position and treated',
    text: 'records:\n  file: a.csv\noutcomes: [y]\nline:\n  zone_name: n\n',
    problems: [
      '1: records.position: missing; name the two columns: [lon, lat]',
      '4: line.zones: missing; write the path of a file',
      '4: line.treated: missing; write [zone, zone] or {property: levy, equals: new}, or a dose',
    ],
  },
  {
    name: 'a misspelt form key',
    text: score.replace('score', 'scores'),
    problems: ['5: line.scores: not a known key; did you mean score?'],
  },
  {
    name: 'two forms mixed',
    text: `${score}  zones: z.geojson\n`,
    problems: [
      '4: line: mixes score and zones: got {"score":"s","cutoff":10,"treated":"below","zones":"z.geo...; keep one of them, and one study for each',
    ],
  },
  {
    name: 'pieces without their names',
    text: distance.replace('d}', 'd, pieces: true}'),
    problems: ['3: line.pieces: needs the piece of each unit: no line.name; name the column in line.name'],
  },
  {
    name: 'two lines',
    text: `${score}line:\n  distance: d\n`,
    problems: ['8: line: written twice, first on line 4; keep one'],
  },
  {
    name: 'no form at all',
    text: 'records: {file: a.csv}\noutcomes: [y]\nline: {}\n',
    problems: ['3: line: must say what the line is: got {}; write score and cutoff, or zones and treated, or distance'],
  },
  {
    name: 'a position on a score line',
    text: score.replace('file: rows.csv', 'file: rows.csv\n  position: [a, b]'),
    problems: ['3: records.position: is for borders only: line has score; leave it out'],
  },
  {
    name: 'numbers written as text, and no numbers',
    text: `${score.replace('cutoff: 10', 'cutoff: "12,5"')}estimation:
  bandwidth: "800"
  donut: 1 200.5
  level: 95
  order: 1.5
disclosure:
  smallest_cell: 0.5
seed: -1
`,
    problems: [
      '6: line.cutoff: must be a finite number: got "12,5"; write 12.5',
      '9: estimation.bandwidth: must be mse, coverage or a number above 0: got "800"; write 800 without quotes',
      '10: estimation.donut: must be 0 or more: got "1 200.5"; write 1200.5',
      '11: estimation.level: must lie between 0 and 1: got 95; write 0.95 for 95%',
      '12: estimation.order: must be 0, 1, 2 or 3: got 1.5; write 1 for local lines',
      '14: disclosure.smallest_cell: must be a whole number, 1 or more: got 0.5; write 10, or 1 to blank nothing',
      '15: seed: must be a whole number, 0 or more: got -1; write 1',
    ],
  },
  {
    name: 'numbers that are not finite, zero or negative',
    text: `${border}  snap: .nan
  piece: 0
  reach: -.inf
  barriers:
    - file: r.geojson
      within: .inf
    - within: 5
estimation: {bandwidth: -3, donut: -1, level: 1}
`,
    problems: [
      '8: line.snap: must be a number above 0: got .nan; write a number above 0',
      '9: line.piece: must be a number above 0: got 0; write a number above 0',
      '10: line.reach: must be a number above 0: got -.inf; write a number above 0',
      '13: line.barriers[0].within: must be a number above 0: got .inf; write a number above 0',
      '14: line.barriers[1].file: missing; write the path of a file',
      '15: estimation.bandwidth: must be a number above 0: got -3; write a number above 0',
      '15: estimation.donut: must be 0 or more: got -1; write 0 or a number above it',
      '15: estimation.level: must lie between 0 and 1: got 1; write 0.95 for 95%',
    ],
  },
  {
    name: 'lists where one thing is wanted, and the reverse',
    text: `records: rows.csv
outcomes: y
line:
  - score: s
estimation: [mse]
`,
    problems: [
      '1: records: must hold keys of its own: got "rows.csv"; write the keys of records indented under it',
      '2: outcomes: must be a list: got "y"; write [y]',
      '3: line: must say what the line is: got [{"score":"s"}]; write score and cutoff, or zones and treated, or distance',
      '5: estimation: must hold keys of its own: got ["mse"]; write the keys of estimation indented under it',
    ],
  },
  {
    name: 'no outcomes',
    text: score.replace('[y]', '[]'),
    problems: ['3: outcomes: must not be empty: got []; list the outcome columns, each once'],
  },
  {
    name: 'an outcome twice, and one that is no name',
    text: score.replace('[y]', '\n  - y\n  - z\n  - y\n').replace('file: rows.csv', 'file: 7'),
    problems: [
      '2: records.file: must be the path of a file: got 7; write the path of a file',
      '3: outcomes: must not repeat an item: got ["y","z","y"]; list the outcome columns, each once',
    ],
  },
  {
    name: 'keys with nothing after the colon',
    text: 'records:\n  file:\noutcomes:\n  - y\n  -\nline:\n  distance: d\n  name: ""\nestimation:\n',
    problems: [
      '2: records.file: nothing after the colon; write the path of a file',
      '5: outcomes[1]: nothing after the colon; write the name of a column',
      '8: line.name: must be the name of a column: got ""; write the name of a column',
      '9: estimation: nothing after the colon; write the keys of estimation indented under it',
    ],
  },
  {
    name: 'words that are not one of the options',
    text: `${score.replace('below', 'at_or_below')}  rescale: yes
estimation:
  kernel: Triangle
  variance: hc5
pooling:
  fixed_effects: yes
  target: population
`,
    problems: [
      '7: line.treated: must be one of at-or-above, above, at-or-below, below: got "at_or_below"; did you mean at-or-below?',
      '8: line.rescale: must be one of none, spread: got "yes"; write one of none, spread',
      '10: estimation.kernel: must be one of triangular, epanechnikov, uniform: got "Triangle"; did you mean triangular?',
      '11: estimation.variance: must be one of hc0, hc1, hc2, hc3, neighbours, clusters, few-clusters: got "hc5"; write one of hc0, hc1, hc2, hc3, neighbours, clusters, few-clusters',
      '13: pooling.fixed_effects: must be true or false: got "yes"; write true',
      '14: pooling.target: must be one of units, equal, precision: got "population"; write one of units, equal, precision',
    ],
  },
  {
    name: 'shares that mix two forms',
    text: `${score}pooling: {target: {shares: people.csv, column: residents}}\n`,
    problems: [
      '8: pooling.target: mixes column and shares: got {"shares":"people.csv","column":"residents"}; keep one of them',
    ],
  },
  {
    name: 'shares with a key misspelt and one missing',
    text: `${score}pooling: {target: {share: people.csv, line: town}}\n`,
    problems: [
      '8: pooling.target.value: missing; write the name of a column',
      '8: pooling.target.share: not a known key; did you mean shares?',
    ],
  },
  {
    name: 'shares of nothing known',
    text: `${score}pooling: {target: {by: town}}\n`,
    problems: [
      '8: pooling.target: must say where the shares are: got {"by":"town"}; write {column} or {shares, line, value}',
    ],
  },
  {
    name: 'shares in the column of names',
    text: `${score}pooling: {target: {shares: people.csv, line: [town, people], value: people}}\n`,
    problems: ['8: pooling.target.value: also names the line: got "people"; name the column that holds the shares'],
  },
  {
    name: 'keys of a border that do not go together',
    text: `${border}  dose: rate
  outside: untreated
  on_conflict: map
  position_error: 25
  repeated_points: {cap: 0}
estimation: {bandwidth: 40}
`,
    problems: [
      '8: line.dose: does not go with treated: both are given; keep one of them',
      '9: line.outside: untreated does not go with dose: got "untreated"; leave it out',
      '10: line.on_conflict: needs the zone by the record: no line.side; name the column in line.side',
      '11: line.position_error: the bandwidth is under twice this: a bandwidth of 40 m, and an error of 25 m; write a wider bandwidth',
      '12: line.repeated_points.cap: must be a whole number, 1 or more: got 0; write how many units a point may have',
    ],
  },
  {
    name: 'variances and intervals that do not go together',
    text: `${border}covariates: [a, a]
estimation:
  interval: bias-aware
  order: 2
  smoothness: smooth
  variance: few-clusters
  spatial: 1500
checks: all
`,
    problems: [
      '8: covariates: must not repeat an item: got ["a","a"]; list the names of columns, each once',
      '10: estimation.interval: bias-aware is for order 1: got order 2; write order 1, or corrected',
      '12: estimation.smoothness: must be rule or a number above 0: got "smooth"; write rule, or a bound on the second derivative',
      '14: estimation.spatial: is a variance of its own: got variance "few-clusters" too; keep one of them',
      '15: checks: must be one of none, standard, full: got "all"; write one of none, standard, full',
    ],
  },
  {
    name: 'variances that need clusters or a map',
    text: `${distance}estimation:
  variance: few-clusters
  spatial: 2
`,
    problems: [
      '5: estimation.variance: few-clusters needs a column: no records.cluster; name the column in records.cluster',
      '6: estimation.spatial: is for borders only: line has distance; leave it out',
      '6: estimation.spatial: is a variance of its own: got variance "few-clusters" too; keep one of them',
    ],
  },
  {
    name: 'cutoffs',
    text: score.replace('cutoff: 10', 'cutoff: {schedule: c.csv, valeu: v}'),
    problems: [
      '6: line.cutoff.by: missing; write the name of a column',
      '6: line.cutoff.valeu: not a known key; did you mean value?',
    ],
  },
  {
    name: 'two forms of cutoff',
    text: score.replace('cutoff: 10', 'cutoff: {column: c, ladder: [1]}'),
    problems: ['6: line.cutoff: mixes column and ladder: got {"column":"c","ladder":[1]}; keep one of them'],
  },
  {
    name: 'a cutoff in no form',
    text: score.replace('cutoff: 10', 'cutoff: {at: 3}'),
    problems: [
      '6: line.cutoff: must say how the cutoff is known: got {"at":3}; write a number, {column}, {schedule, by, value} or {ladder}',
    ],
  },
  {
    name: 'a ladder with a repeated step, and one with a step that is text',
    text: score.replace('cutoff: 10', 'cutoff: {ladder: [1, 2, 1.0]}'),
    problems: ['6: line.cutoff.ladder: must not repeat an item: got [1,2,1]; list the steps, each once'],
  },
  {
    name: 'a ladder with a step that is text',
    text: score.replace('cutoff: 10', 'cutoff:\n    ladder:\n      - 1\n      - 2,5'),
    problems: ['9: line.cutoff.ladder[1]: must be a finite number: got "2,5"; write 2.5'],
  },
  {
    name: 'an empty ladder',
    text: score.replace('cutoff: 10', 'cutoff: {ladder: []}'),
    problems: ['6: line.cutoff.ladder: must not be empty: got []; list the steps, each once'],
  },
  {
    name: 'a schedule whose value is its key, and a cutoff column that is the score',
    text: score.replace('cutoff: 10', 'cutoff: {schedule: c.csv, by: [year], value: year}'),
    problems: [
      '6: line.cutoff.value: is also a key of the schedule: got "year"; name the column that holds the cutoffs',
    ],
  },
  {
    name: 'a cutoff column that is the score',
    text: score.replace('cutoff: 10', 'cutoff: {column: s}'),
    problems: ['6: line.cutoff.column: is the score itself: got "s"; name the column that holds the cutoffs'],
  },
  {
    name: 'clusters without a column',
    text: `${score}estimation: {variance: clusters}\n`,
    problems: [
      '8: estimation.variance: clusters needs a column: no records.cluster; name the column in records.cluster',
    ],
  },
  {
    name: 'treated zones as one word, and treated twice',
    text: border.replace('[Inner]', 'below'),
    problems: [
      '7: line.treated: must say which zones are treated: got "below"; write [zone, zone] or {property: levy, equals: new}',
    ],
  },
  {
    name: 'bandwidths that lack a part',
    text: `${score}estimation: {bandwidth: {untreated: 3, main: mse}, donut: 3}\n`,
    problems: [
      '8: estimation.bandwidth.treated: missing; write a number above 0',
      '8: estimation.bandwidth.main: not a known key; known here: untreated, treated, bias',
      '8: estimation.donut: leaves no units inside the bandwidth: got 3, and a bandwidth of 3; write a donut below the bandwidth',
    ],
  },
  {
    name: 'a bias bandwidth alone',
    text: `${score}estimation: {bandwidth: {bias: 12}}\n`,
    problems: ['8: estimation.bandwidth.main: missing; write mse, coverage or a number'],
  },
  {
    name: 'positions that are not two columns',
    text: border.replace('[lon, lat]', '[lon]'),
    problems: ['3: records.position: must name two columns: got ["lon"]; write [longitude column, latitude column]'],
  },
  {
    name: 'keys written twice, with both lines',
    text: `${score}outcomes: [z]\nline:\n  score: t\n`,
    problems: [
      '8: outcomes: written twice, first on line 3; keep one',
      '9: line: written twice, first on line 4; keep one',
    ],
  },
  {
    name: 'a tab as indentation',
    text: 'records:\n\tfile: a.csv\noutcomes: [y]\n',
    problems: ['2: not valid YAML: tabs are not allowed as indentation; indent with spaces'],
  },
  {
    name: 'an open bracket',
    text: 'records: {file: a.csv}\noutcomes: [y\nline: {distance: d}\n',
    problems: [
      '3: not valid YAML: flow sequence in block collection must be sufficiently indented and end with a ]; close the quote or bracket, and check the indentation',
    ],
  },
  {
    name: 'no space after a colon',
    text: 'records: {file: a.csv}\nseed:1\noutcomes: [y]\n',
    problems: [
      '2: not valid YAML: implicit keys need to be on a single line; write a space after the colon of each key',
    ],
  },
  {
    name: 'two documents',
    text: `${score}---\n${score}`,
    problems: ['8: several studies in one file: a second document begins here; keep one study in a file'],
  },
  {
    name: 'a tag and an alias that nothing explains',
    text: 'records: {file: !path a.csv}\noutcomes: [y]\nline: {distance: d}\n',
    problems: ['1: not valid YAML: unresolved tag: !path; leave the ! tag out'],
  },
  {
    name: 'an alias without an anchor',
    text: 'records: {file: a.csv}\noutcomes: [y]\nline: *there\n',
    problems: ["3: line: the alias *there can't be followed; write the value out"],
  },
  {
    name: 'an alias to what holds it',
    text: 'records: &r\n  file: *r\noutcomes: [y]\nline: {distance: d}\n',
    problems: ["2: records.file: the alias *r can't be followed; write the value out"],
  },
  {
    name: 'a key that is a list',
    text: '? [a]\n: b\nrecords: {file: a.csv}\n',
    problems: ['1: the study: a key that is not text; write a plain key'],
  },
  {
    name: 'an empty file',
    text: '# nothing\n',
    problems: ['1: the study must hold keys: an empty file; begin with records, outcomes and line'],
  },
  {
    name: 'a list',
    text: '- a\n',
    problems: ['1: the study must hold keys: a list; begin with records, outcomes and line'],
  },
  {
    name: 'variants that are no studies',
    text: `${distance}variants:
  empty: {}
  two: 2
  titled: {title: Other}
  wide: {estimation: {bandwidth: {scale: 0}}}
`,
    problems: [
      '5: variants.empty: must hold keys of its own: got {}; write the keys that differ: {estimation: {order: 2}}',
      '6: variants.two: must hold keys of its own: got 2; write the keys that differ: {estimation: {order: 2}}',
      "7: variants.titled.title: a variant has the study's own: it is written here; leave it out",
      '8: variants.wide.estimation.bandwidth.scale: must be a number above 0: got 0; write 0.5 for half the bandwidth',
    ],
  },
  {
    name: 'variants with faults of their own, at their own lines',
    text: `${distance}variants:
  order five:
    estimation:
      order: 5
  donut:
    estimation: {bandwidth: 10, donut: 20}
`,
    problems: [
      '7: variant order five: estimation.order: must be 0, 1, 2 or 3: got 5; write 1 for local lines',
      '9: variant donut: estimation.donut: leaves no units inside the bandwidth: got 20, and a bandwidth of 10; write a donut below the bandwidth',
    ],
  },
  {
    name: 'plain text',
    text: 'lon,lat\n1,2\n',
    problems: ['1: the study must hold keys: plain text; begin with records, outcomes and line'],
  },
  {
    name: 'names that objects have of themselves',
    text: `${distance}__proto__: 1\nconstructor: 2\ntoString: 3\n`,
    problems: [
      '4: __proto__: not a known key; known here: title, records, outcomes, line, take_up, covariates, predetermined, estimation, pooling, checks, audit, away_from_line, disclosure, variants, plan, seed',
      '5: constructor: not a known key; known here: title, records, outcomes, line, take_up, covariates, predetermined, estimation, pooling, checks, audit, away_from_line, disclosure, variants, plan, seed',
      '6: toString: not a known key; known here: title, records, outcomes, line, take_up, covariates, predetermined, estimation, pooling, checks, audit, away_from_line, disclosure, variants, plan, seed',
    ],
  },
]
