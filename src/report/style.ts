/** The page's whole style sheet: screen first, then paper (A4, black on white, no plot cut in two). */
export const STYLE = `
:root { color-scheme: light; --ink: #1a1a1a; --quiet: #595959; --rule: #d4d4d4; --soft: #f5f5f2; }
* { box-sizing: border-box; }
body { margin: 0 auto; padding: 2.5rem 1.5rem 4rem; max-width: 62rem; background: #fff; color: var(--ink);
  font: 16px/1.5 system-ui, -apple-system, "Segoe UI", "Liberation Sans", Arial, sans-serif; }
h1 { font-size: 1.9rem; line-height: 1.2; margin: 0 0 .25rem; overflow-wrap: anywhere; }
h2 { font-size: 1.25rem; margin: 2.75rem 0 .75rem; padding-top: .6rem; border-top: 2px solid var(--ink); }
p, ul, dl { margin: 0 0 .8rem; max-width: 46rem; }
.under { color: var(--quiet); margin-bottom: 1.5rem; overflow-wrap: anywhere; }
.lead { font-size: 1.1rem; }
.notes { background: var(--soft); border-left: 4px solid #d55e00; padding: .8rem 1rem .2rem; }
.notes ul { padding-left: 1.1rem; margin-top: 0; }
nav ul { list-style: none; padding: 0; display: flex; flex-wrap: wrap; gap: .2rem 1.2rem; }
a { color: #005a8f; }
.wide { overflow-x: auto; margin: 0 0 1.5rem; }
table { border-collapse: collapse; font-size: .92rem; font-variant-numeric: tabular-nums; min-width: 50%; }
caption { text-align: left; font-weight: 600; padding: 0 0 .4rem; }
th, td { padding: .28rem .55rem .28rem 0; text-align: left; vertical-align: top; border-bottom: 1px solid var(--rule); }
th + th, th + td, td + td { padding-left: .55rem; padding-right: 0; }
thead th { border-bottom: 1.5px solid var(--ink); font-weight: 600; vertical-align: bottom; }
tbody th { font-weight: 400; }
td { overflow-wrap: anywhere; }
table.compact th, table.compact td { white-space: nowrap; }
.number { text-align: right; white-space: nowrap; overflow-wrap: normal; }
tr.own > * { font-weight: 600; background: var(--soft); }
tr.group > * { border-top: 1.5px solid var(--ink); }
figure { margin: 0 0 1.5rem; }
.plots { display: grid; gap: 1rem 1.25rem; align-items: start; }
.of-1 { max-width: 32rem; }
.of-2 { grid-template-columns: repeat(2, minmax(0, 1fr)); }
.of-3 { grid-template-columns: repeat(3, minmax(0, 1fr)); }
.plots svg { width: 100%; height: auto; }
figcaption { color: #333; font-size: .92rem; margin-top: .6rem; }
code, pre { font-family: ui-monospace, "DejaVu Sans Mono", Menlo, Consolas, monospace; font-size: .88em; }
pre { background: var(--soft); padding: .8rem 1rem; overflow-x: auto; white-space: pre-wrap; overflow-wrap: anywhere; }
@media screen and (max-width: 44rem) { .of-2, .of-3 { grid-template-columns: minmax(0, 1fr); } }
@page { size: A4; margin: 16mm 15mm 18mm; }
@media print {
  body { max-width: none; padding: 0; font-size: 10pt; line-height: 1.4; color: #000; }
  nav { display: none; }
  h1 { font-size: 18pt; }
  h2 { font-size: 13pt; margin: 7mm 0 3mm; padding-top: 2mm; }
  h1, h2, caption { break-after: avoid; }
  p, ul { max-width: none; orphans: 3; widows: 3; }
  figure, tr, pre, .wide, .notes, .lead { break-inside: avoid; }
  thead { display: table-header-group; }
  .wide { overflow: visible; }
  table { font-size: 8.6pt; }
  figcaption, .under { font-size: 8.8pt; color: #222; }
  .notes, tr.own > *, pre { background: #fff; }
  .notes { border: 1px solid #000; border-left-width: 4px; }
  a { color: inherit; text-decoration: none; }
}
`;
