import { COLOURS, FONT } from '../figures/theme.ts';

/** One column of text with the answer on a dark plate above it; prints on white without the plate. */
export const STYLE = `
:root { color-scheme: light; --ink: ${COLOURS.ink}; --record: ${COLOURS.record}; --warm: ${COLOURS.warm}; --soft: ${COLOURS.soft}; --rule: #d5dcde; }
* { box-sizing: border-box; }
body { margin: 0; background: #f6f4ef; color: var(--ink); font: 16px/1.5 ${FONT}; }
main, header > div, footer { max-width: 62rem; margin: 0 auto; padding: 0 1.5rem; }
header { background: var(--ink); color: #f6f4ef; padding: 1.6rem 0 1.8rem; }
header p { margin: 0; color: #c9d5d8; }
h1 { font-size: 1.35rem; font-weight: 600; margin: 0 0 .2rem; }
.lead { font-size: 1.25rem; line-height: 1.4; color: #fff; margin: 1.1rem 0 1.3rem; max-width: 48rem; }
.plate { display: grid; grid-template-columns: repeat(auto-fit, minmax(15rem, 1fr)); gap: 1.2rem; margin: 0; }
.plate div { border-left: 4px solid var(--warm); padding-left: .9rem; }
.plate dt { font-size: .85rem; color: #c9d5d8; }
.plate dd { margin: 0; font-size: 1.3rem; font-weight: 600; }
.plate dd small { display: block; font-size: .85rem; font-weight: 400; color: #dfe6e7; }
section { padding: 1.4rem 0 .6rem; border-bottom: 1px solid var(--rule); }
h2 { font-size: 1.5rem; font-weight: 600; margin: 0 0 .8rem; color: var(--record); }
h3 { font-size: 1.02rem; margin: 1.4rem 0 .3rem; }
p { max-width: 46rem; }
figure { margin: 1rem 0 1.4rem; background: #fff; border: 1px solid var(--rule); padding: .8rem 1rem; max-width: 44rem; }
figure svg { max-width: 100%; height: auto; display: block; }
figcaption { font-size: .88rem; color: #44535e; margin-top: .5rem; }
table { border-collapse: collapse; margin: .6rem 0 1.2rem; font-size: .93rem; }
caption { text-align: left; font-weight: 600; padding-bottom: .3rem; }
th, td { text-align: left; vertical-align: top; padding: .32rem 1.1rem .32rem 0; border-bottom: 1px solid var(--rule); }
th { font-weight: 600; }
td.number { text-align: right; font-variant-numeric: tabular-nums; white-space: nowrap; }
.refused { color: #6b4a1e; }
.refused b { font-weight: 600; }
ul { padding-left: 1.2rem; max-width: 48rem; }
li { margin: .3rem 0; }
.says { font-weight: 600; }
code { font-size: .9em; }
footer { padding: 1.2rem 1.5rem 3rem; font-size: .85rem; color: #55636d; }
a { color: var(--record); }
@media print {
  body { background: #fff; font-size: 10.5pt; }
  header { background: #fff; color: var(--ink); border-bottom: 2px solid var(--ink); }
  .lead { color: var(--ink); } header p, .plate dt, .plate dd small { color: #44535e; }
  figure { break-inside: avoid; border: none; padding: 0; } h2, h3 { break-after: avoid; } tr { break-inside: avoid; }
}
`;
