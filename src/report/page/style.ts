/** The page's one style sheet. Figures take their colours from the same names as the text, in light, dark and print. */

const light = `
  --paper: #fbfaf6; --raised: #ffffff; --ink: #1d2126; --muted: #565d66; --rule: #d9d5ca; --accent: #9a3a0d;
  --grid: #e2dfd6; --untreated: #2b5c86; --treated: #a5400f; --land: #f3f1ec; --land-treated: #e4dfd3;
  --hatch: #bdb5a3; --zone: #a9a59b; --barrier: #8fb9cf; --wash: #f3efe5; --band: #e4e6e9;`

const dark = `
  --paper: #15181b; --raised: #1b1f23; --ink: #e8e5de; --muted: #a6acb3; --rule: #363c43; --accent: #f0a27a;
  --grid: #2c3238; --untreated: #8fbbe0; --treated: #f0935f; --land: #20252a; --land-treated: #2c3137;
  --hatch: #4a525b; --zone: #59616a; --barrier: #3f7390; --wash: #20242a; --band: #2f353c;`

export const pageStyle = `
:root { color-scheme: light dark;${light}
  --serif: Charter, "Bitstream Charter", "Sitka Text", Cambria, Georgia, serif;
  --sans: system-ui, -apple-system, "Segoe UI", Roboto, "Helvetica Neue", Arial, sans-serif;
  --mono: ui-monospace, "SF Mono", Menlo, Consolas, "DejaVu Sans Mono", monospace; }
@media (prefers-color-scheme: dark) { :root {${dark} } }
* { box-sizing: border-box; }
html { scroll-behavior: smooth; -webkit-text-size-adjust: 100%; text-size-adjust: 100%; }
body { margin: 0; background: var(--paper); color: var(--ink); font: 1.0625rem/1.6 var(--serif); overflow-wrap: break-word; }
.skip { position: absolute; left: -100vw; top: 0; padding: .6rem 1rem; background: var(--ink); color: var(--paper); z-index: 2; }
.skip:focus { left: 0; }
.sheet { max-width: 96rem; margin: 0 auto; padding: 0 clamp(1rem, 4vw, 3rem) 4rem; }
.top { padding: 2.75rem 0 1.75rem; border-bottom: 1px solid var(--rule); }
.kicker { margin: 0 0 .9rem; display: flex; align-items: center; gap: .7rem; font: 600 .8125rem/1.3 var(--sans); color: var(--muted); letter-spacing: .02em; }
.kicker svg { flex: none; }
h1, h2, h3 { font-weight: 600; line-height: 1.2; text-wrap: balance; }
h1 { font-size: clamp(1.7rem, 1.2rem + 2.4vw, 2.7rem); letter-spacing: -.012em; margin: 0 0 .7rem; max-width: 24em; }
h2 { font-size: 1.5rem; margin: 0 0 1rem; letter-spacing: -.005em; }
h3 { font-size: 1.125rem; margin: 2rem 0 .6rem; }
.by { margin: 0; font: .875rem/1.5 var(--sans); color: var(--muted); }
.body { display: grid; grid-template-columns: minmax(0, 1fr); }
nav { font: .875rem/1.4 var(--sans); padding: 1rem 0; border-bottom: 1px solid var(--rule); }
nav h2 { position: absolute; width: 1px; height: 1px; overflow: hidden; clip-path: inset(50%); }
nav ul { list-style: none; margin: 0; padding: 0; display: flex; flex-wrap: wrap; gap: .15rem 1.3rem; }
nav a { display: inline-block; padding: .25rem 0; color: var(--ink); text-decoration: none; border-bottom: 1px solid transparent; }
nav a:hover { color: var(--accent); border-color: var(--accent); }
a { color: var(--accent); }
:focus-visible { outline: 2px solid var(--accent); outline-offset: 3px; }
main section { padding: 2.5rem 0 .5rem; }
main section + section { border-top: 1px solid var(--rule); margin-top: 2rem; }
p { margin: 0 0 .9rem; max-width: 42em; }
.answer + .answer { margin-top: 2.5rem; padding-top: 2rem; border-top: 1px dotted var(--rule); }
.answer h3 { margin: 0 0 .5rem; font: 600 .9375rem/1.3 var(--sans); color: var(--muted); }
.head { display: flex; flex-wrap: wrap; align-items: baseline; gap: .1rem 1.2rem; margin: 0 0 1.1rem; max-width: none; }
.head strong { font-size: clamp(2.4rem, 1.8rem + 3vw, 3.6rem); line-height: 1.05; font-weight: 600; color: var(--accent); letter-spacing: -.02em; font-variant-numeric: lining-nums; }
.head span { font: 1rem/1.4 var(--sans); }
.facts { display: grid; grid-template-columns: repeat(auto-fit, minmax(min(100%, 15rem), 1fr)); gap: .9rem 1.8rem; margin: 1.3rem 0 0; padding: .95rem 0; border-top: 1px solid var(--rule); border-bottom: 1px solid var(--rule); font-family: var(--sans); }
.facts dt { font-size: .8125rem; color: var(--muted); }
.facts dd { margin: .1rem 0 0; font-size: .9375rem; font-variant-numeric: tabular-nums; }
.terms { font-size: .9375rem; color: var(--muted); margin-top: 1.3rem; }
.cautions { list-style: none; margin: 0; padding: 0; display: grid; grid-template-columns: repeat(auto-fill, minmax(min(100%, 21rem), 1fr)); gap: 1.2rem 2.4rem; }
.cautions li { border-top: 2px solid var(--accent); padding-top: .6rem; font-size: .9375rem; line-height: 1.5; }
.cautions strong { display: block; margin-bottom: .15rem; }
figure { margin: 1.5rem 0 2.25rem; }
figcaption { font-size: .9375rem; line-height: 1.5; color: var(--muted); max-width: 46em; margin-top: .7rem; }
figcaption b { color: var(--ink); font-weight: 600; }
.files { font: .8125rem/1.5 var(--sans); white-space: nowrap; }
details { margin: .9rem 0 0; max-width: 62rem; }
summary { font: 600 .875rem/1.5 var(--sans); color: var(--accent); cursor: pointer; padding: .25rem 0; }
details figure { margin: .9rem 0 1.25rem; }
.drawing { overflow: auto; max-width: 62rem; padding: 1.1rem 1.4rem; background: var(--raised); border: 1px solid var(--rule); }
.drawing.tall { max-height: 85vh; }
.drawing svg { display: block; width: 100%; min-width: 37rem; height: auto; }
.scroll { overflow: auto; border-top: 2px solid var(--ink); border-bottom: 2px solid var(--ink); margin: 1.5rem 0 .8rem; }
.scroll.tall { max-height: 80vh; }
table { border-collapse: collapse; width: 100%; font: .875rem/1.4 var(--sans); font-variant-numeric: tabular-nums lining-nums; }
caption { text-align: left; font: 600 1rem/1.4 var(--serif); padding: .6rem 0; }
th, td { padding: .36rem 0 .36rem 1.25rem; text-align: right; vertical-align: baseline; white-space: nowrap; font-weight: 400; }
thead th { border-bottom: 1px solid var(--ink); font-weight: 600; vertical-align: bottom; white-space: normal; min-width: 4.6em; background: var(--paper); }
.tall thead th { position: sticky; top: 0; box-shadow: 0 1px 0 var(--ink); }
tbody tr + tr > * { border-top: 1px solid var(--grid); }
tbody tr:hover > * { background: var(--wash); }
th:first-child, td:first-child { padding-left: .2rem; text-align: left; }
td:last-child, th:last-child { padding-right: .2rem; }
tbody th { white-space: normal; min-width: 9.5em; }
.words { text-align: left; white-space: normal; min-width: 7em; }
td.words:last-child { min-width: 15em; }
td.words:nth-child(2), th.words:nth-child(2) { min-width: 13em; }
.dense table { font-size: .8125rem; }
.dense th, .dense td { padding-left: .75rem; }
.dense th:first-child { padding-left: .2rem; }
.dense tbody th { min-width: 14.5em; }
.dense thead th { min-width: 4em; }
.across td { color: var(--muted); font-style: italic; }
.note { font-size: .875rem; line-height: 1.5; color: var(--muted); max-width: 58em; margin: 0 0 .4rem; }
.methods { margin: 0; padding: 0; list-style: none; max-width: 46em; }
.methods li { padding: .55rem 0; border-top: 1px solid var(--grid); }
.methods li:first-child { border-top: 0; padding-top: 0; }
.methods cite { display: block; font: .8125rem/1.5 var(--sans); color: var(--muted); }
pre { overflow: auto; margin: 0; padding: 1rem 1.2rem; background: var(--raised); border: 1px solid var(--rule); font: .8125rem/1.55 var(--mono); tab-size: 2; }
.passports { border-top: 1px solid var(--rule); }
.passport { border-bottom: 1px solid var(--rule); content-visibility: auto; contain-intrinsic-size: auto 2.6rem; }
.passport summary { padding: .55rem 0; cursor: pointer; font: .9375rem/1.4 var(--sans); }
.passport summary .name { font-weight: 600; }
.passport summary .gist { color: var(--muted); margin-left: .75rem; font-variant-numeric: tabular-nums; }
.passport .inside { padding: 0 0 1rem 1rem; }
.passport:target summary { outline: 2px solid var(--ink); outline-offset: 2px; }
.pictures { display: flex; flex-wrap: wrap; gap: 1.25rem; margin: .75rem 0; }
.pictures figure { margin: 0; }
.pictures figcaption { font: .8125rem/1.4 var(--sans); color: var(--muted); }
svg.shared { position: absolute; }
.passport-controls { display: flex; flex-wrap: wrap; gap: .75rem 1.25rem; align-items: end; margin: .75rem 0; font: .875rem/1.4 var(--sans); }
.passport-controls input, .passport-controls select, .passport-controls button { font: inherit; padding: .3rem .5rem; color: var(--ink); background: var(--raised); border: 1px solid var(--muted); border-radius: 3px; }
.inputs td, .inputs th { font-size: .8125rem; }
.hash { font-family: var(--mono); }
footer { margin-top: 3rem; padding-top: 1rem; border-top: 1px solid var(--rule); font: .8125rem/1.5 var(--sans); color: var(--muted); }
.choices { margin: 1.4rem 0 1.2rem; padding: 1rem 1.2rem; background: var(--raised); border: 1px solid var(--rule); font: .9375rem/1.4 var(--sans); }
.choices .fields { display: grid; grid-template-columns: repeat(auto-fill, minmax(min(100%, 13rem), 1fr)); gap: .8rem 1.2rem; }
.choices p { margin: 0; display: flex; flex-direction: column; gap: .2rem; }
.choices label { font-size: .8125rem; color: var(--muted); }
.choices select, .choices button { font: inherit; color: var(--ink); background: var(--paper); border: 1px solid var(--muted); border-radius: 3px; padding: .3rem .5rem; max-width: 100%; min-height: 2rem; }
.choices button { cursor: pointer; }
.choices button:disabled, .choices select:disabled { color: var(--muted); border-color: var(--rule); cursor: default; }
.choices .slide { max-width: none; display: grid; grid-template-columns: auto minmax(8rem, 1fr) auto; align-items: center; gap: .2rem .9rem; margin: 1rem 0; }
.choices .tick { flex-direction: row; align-items: center; gap: .5rem; margin: 0 0 1rem; }
.choices .tick input { accent-color: var(--accent); width: 1.2rem; height: 1.2rem; margin: 0; }
.choices .slide input { width: 100%; height: 2rem; margin: 0; accent-color: var(--accent); }
.choices output { font-variant-numeric: tabular-nums; min-width: 6em; }
.now { font-size: 1.25rem; line-height: 1.4; min-height: 2.8em; max-width: 40em; }
.pair figure { margin: 0; }
.pair { margin: 1.5rem 0; display: grid; grid-template-columns: repeat(auto-fit, minmax(min(100%, 30rem), 1fr)); gap: 1rem; }
.pair .drawing svg { min-width: 26rem; }
.f-ink { fill: var(--ink); } .f-muted { fill: var(--muted); } .f-grid { fill: var(--grid); } .f-untreated { fill: var(--untreated); }
.f-treated { fill: var(--treated); } .f-paper { fill: var(--raised); } .f-background { fill: none; }
.f-band { fill: var(--band); }
.f-land { fill: var(--land); } .f-landtreated { fill: var(--land-treated); }
.s-ink { stroke: var(--ink); } .s-muted { stroke: var(--muted); } .s-grid { stroke: var(--grid); } .s-untreated { stroke: var(--untreated); }
.s-treated { stroke: var(--treated); } .s-paper { stroke: var(--raised); } .s-hatch { stroke: var(--hatch); } .s-zone { stroke: var(--zone); }
.s-barrier { stroke: var(--barrier); }
@media (min-width: 72rem) {
  .body { grid-template-columns: 10.5rem minmax(0, 1fr); column-gap: 3rem; }
  nav { border: 0; padding: 2.75rem 0 0; }
  nav ul { position: sticky; top: 1.5rem; flex-direction: column; border-left: 1px solid var(--rule); padding-left: 1rem; }
}
@media (max-width: 40rem) {
  body { font-size: 1rem; }
  .top { padding-top: 1.75rem; }
  .drawing { padding: .6rem; }
  .choices .slide { grid-template-columns: minmax(0, 1fr); }
}
@media (prefers-reduced-motion: reduce) { html { scroll-behavior: auto; } }
@media print {
  :root {${light} --paper: #ffffff; }
  body { font-size: 10pt; }
  nav, .skip, .choices button { display: none; }
  .pair { display: block; }
  .sheet { max-width: none; padding: 0; }
  .body { display: block; }
  .drawing, .scroll, .drawing.tall, .scroll.tall { overflow: visible; max-height: none; border-color: #999999; }
  .drawing { border: 0; padding: 0; }
  .files { display: none; }
  details:not([open]) { display: none; }
  .drawing svg { min-width: 0; max-width: min(100%, 14.5cm); }
  .tall thead th { position: static; }
  table { font-size: 7.5pt; }
  th, td { padding-left: .6em; white-space: normal; }
  pre { white-space: pre-wrap; }
  h2, h3, caption { break-after: avoid; }
  figure, .answer, .cautions li, tr { break-inside: avoid; }
}
`
