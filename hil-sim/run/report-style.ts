/** The look of reports: one set of tokens for light, dark and paper; nothing is fetched. */

export const REPORT_STYLE = `
:root {
  color-scheme: light dark;
  --paper: #fbfaf7; --ink: #16202a; --quiet: #4b5763; --rule: #b9c0c4; --wash: #eceae3;
  --room: #2c5f73; --lack: #a3210f;
  --water: #dfe9ec;
  --vehicle-0: #8a5200; --vehicle-1: #1b4fc4; --vehicle-2: #00735a; --vehicle-3: #b3340b;
  --vehicle-4: #6a3aa8; --vehicle-5: #006d8c; --vehicle-6: #a8185c; --vehicle-7: #4f5b00;
}
@media (prefers-color-scheme: dark) {
  :root {
    --paper: #10171c; --ink: #eef1ee; --quiet: #aab6bd; --rule: #46535b; --wash: #1d272d;
    --room: #7fbdd4; --lack: #ff9a86;
    --water: #1a2a31;
    --vehicle-0: #f0b04a; --vehicle-1: #8fb2ff; --vehicle-2: #57d1ae; --vehicle-3: #ff9266;
    --vehicle-4: #c9a6ff; --vehicle-5: #5fcbe8; --vehicle-6: #ff8abb; --vehicle-7: #c3cf58;
  }
}
@media print {
  :root {
    color-scheme: light;
    --paper: #fff; --ink: #000; --quiet: #333; --rule: #999; --wash: #eee; --room: #2c5f73;
    --lack: #a3210f; --water: #e6edef;
    --vehicle-0: #8a5200; --vehicle-1: #1b4fc4; --vehicle-2: #00735a; --vehicle-3: #b3340b;
    --vehicle-4: #6a3aa8; --vehicle-5: #006d8c; --vehicle-6: #a8185c; --vehicle-7: #4f5b00;
  }
  section, figure, tr, .limit { break-inside: avoid; }
  section.long { break-inside: auto; }
  h2 { break-after: avoid; }
}
* { box-sizing: border-box; }
body {
  margin: 0 auto; padding: 1.5rem 1.25rem 3rem; max-width: 68rem; background: var(--paper);
    color: var(--ink);
  font: 1rem/1.45 system-ui, -apple-system, "Segoe UI", Roboto, "Noto Sans", sans-serif;
    font-variant-numeric: tabular-nums;
}
h1 { font-size: 1.55rem; line-height: 1.25; margin: 0 0 .5rem; max-width: 54rem; font-weight: 650;
  text-wrap: pretty; }
h2 { font-size: 1.1rem; margin: 2.2rem 0 .5rem; border-top: 2px solid var(--ink); padding-top: .45rem;
  font-weight: 650; }
p { margin: .3rem 0; max-width: 46rem; }
.quiet, figcaption, .says { color: var(--quiet); }
.says, figcaption, footer { font-size: .875rem; font-weight: 400; line-height: 1.4; }
figcaption { margin-top: .35rem; }
code { font-family: ui-monospace, Menlo, Consolas, monospace; font-size: .9em; overflow-wrap: anywhere; }
ol.limits { list-style: none; margin: 0; padding: 0; }
.limit {
  display: grid; align-items: center; column-gap: 1rem; row-gap: .1rem; padding: .45rem 0;
    border-bottom: 1px solid var(--rule);
  grid-template-columns: minmax(11rem, 1.6fr) 7rem 9.5rem minmax(7rem, 1fr) 7.5rem minmax(8.5rem, 1fr);
}
.limit .value, .limit .margin { text-align: right; }
.limit .value { font-weight: 650; }
.limit .name b { font-weight: 650; }
.limit .word { font-weight: 650; }
.limit.unmet .word, .limit.unmet .margin { color: var(--lack); }
.bar { display: block; width: 100%; height: 1.1rem; overflow: visible; }
.pair { display: grid; grid-template-columns: repeat(2, minmax(0, 1fr)); gap: 1.2rem 1.6rem; }
.trio { display: grid; grid-template-columns: repeat(3, minmax(0, 1fr)); gap: 1.2rem; margin-top: 1rem; }
.lead { display: grid; grid-template-columns: minmax(0, 3fr) minmax(14rem, 2fr); gap: 1.6rem;
  align-items: start; }
figure { margin: 0; }
figure h3 { font-size: .95rem; margin: 0 0 .15rem; font-weight: 650; }
figure > svg { width: 100%; height: auto; display: block; overflow: visible; }
figure svg text { font-family: system-ui, -apple-system, "Segoe UI", Roboto, "Noto Sans", sans-serif; }
.mark { width: 1em; height: 1em; vertical-align: -.12em; margin-right: .3em; }
ul.legend { list-style: none; display: flex; flex-wrap: wrap; gap: .2rem 1.2rem;
  margin: .4rem 0 .8rem; padding: 0; }
ul.keys { list-style: none; margin: .3rem 0; padding: 0; }
ul.keys li { margin: .25rem 0; padding-left: 2.9em; text-indent: -2.9em; }
ul.keys .mark { margin: 0 1.15em 0 .75em; }
.key { width: 2.4em; height: .8em; vertical-align: -.05em; margin-right: .5em; overflow: visible; }
.scroll { overflow-x: auto; }
table { border-collapse: collapse; width: 100%; font-size: .925rem; }
th, td { text-align: right; padding: .3rem .5rem; border-bottom: 1px solid var(--rule);
  white-space: nowrap; }
th { font-weight: 650; vertical-align: bottom; white-space: normal; }
th:first-child, td:first-child { text-align: left; padding-left: 0; }
tbody tr:last-child td { border-bottom: 2px solid var(--ink); }
dl.facts { display: grid; grid-template-columns: max-content 1fr; gap: .15rem 1rem; margin: .3rem 0; }
dl.facts dt { color: var(--quiet); } dl.facts dd { margin: 0; min-width: 0; }
footer { margin-top: 2rem; border-top: 1px solid var(--rule); padding-top: .6rem; color: var(--quiet); }
@media screen and (max-width: 52rem) {
  body { padding: 1rem .9rem 2rem; }
  h1 { font-size: 1.3rem; }
  .pair, .trio, .lead { grid-template-columns: minmax(0, 1fr); }
  .limit { grid-template-columns: 1fr auto; }
  .limit .name, .limit .bar, .limit .where { grid-column: 1 / -1; }
  .limit .allowed { text-align: right; } .limit .value { text-align: left; }
  .limit .margin { grid-column: 2; } .limit .word { grid-column: 1; grid-row: 4; }
    .limit .margin { grid-row: 4; }
  .limit .bar { grid-row: 3; } .limit .where { grid-row: 5; } .limit .where:empty { display: none; }
}
@media print {
  html { font-size: 11px; }
  body { padding: 0; max-width: none; }
  .scroll { overflow: visible; }
  th, td { padding: .25rem .35rem; }
  .pair svg { font-size: 15px !important; }
  .trio svg { font-size: 15px !important; }
}
`;
