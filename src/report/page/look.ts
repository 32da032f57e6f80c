/** The style sheet of the page: on white, on a dark screen, on a phone and in print. */
export const LOOK = `
:root { color-scheme: light dark; --paper: #ffffff; --ink: #1b1b1b; --quiet: #4d4d4d; --rule: #b9b9b9; --faint: #f3f4f6; --good: #17603a; --bad: #a30b1e; --open: #6b4a00; --link: #0a2f7a; }
@media (prefers-color-scheme: dark) { :root { --paper: #15181b; --ink: #eeeeee; --quiet: #bdbdbd; --rule: #4a5158; --faint: #1e2327; --good: #7fd3a0; --bad: #ff8b98; --open: #e6c36a; --link: #8ab8ff; } }
* { box-sizing: border-box; }
html { -webkit-text-size-adjust: 100%; scroll-behavior: auto; }
body { margin: 0; background: var(--paper); color: var(--ink); font: 1rem/1.5 system-ui, -apple-system, "Segoe UI", "DejaVu Sans", sans-serif; font-variant-numeric: tabular-nums; }
.skip { position: absolute; left: -999rem; padding: .5rem 1rem; background: var(--ink); color: var(--paper); }
.skip:focus { left: .5rem; top: .5rem; z-index: 1; }
a { color: var(--link); }
:focus-visible { outline: 3px solid var(--link); outline-offset: 2px; }
header, main, footer { max-width: 60rem; margin: 0 auto; padding: 0 1.25rem; }
header { padding-top: 1.5rem; }
h1 { font-size: 1.7rem; line-height: 1.2; margin: 0 0 .25rem; }
h2 { font-size: 1.25rem; margin: 2.5rem 0 .75rem; padding-bottom: .25rem; border-bottom: 2px solid var(--ink); }
h3 { font-size: 1.05rem; line-height: 1.35; margin: 2rem 0 .25rem; }
p { margin: .25rem 0 .75rem; max-width: 46rem; }
.quiet { color: var(--quiet); }
.plate { display: grid; grid-template-columns: repeat(4, 1fr); gap: 1px; margin: 1rem 0 0; border: 1px solid var(--ink); background: var(--rule); }
.plate div { padding: .35rem .6rem; background: var(--paper); }
.plate dt { font-size: .78rem; color: var(--quiet); }
.plate dd { margin: 0; overflow-wrap: anywhere; }
nav ol { display: flex; flex-wrap: wrap; gap: .25rem 1.25rem; list-style: none; margin: 1rem 0 0; padding: 0; font-size: .92rem; }
.verdict { list-style: none; margin: 0; padding: 0; }
.verdict li { display: grid; grid-template-columns: 8.5rem 1fr; gap: 0 1rem; padding: .5rem 0; border-bottom: 1px solid var(--rule); }
.verdict .about { font-weight: 700; }
.mark { width: 1.05em; height: 1.05em; margin-right: .5em; vertical-align: -.12em; fill: none; stroke-width: 2.6; stroke-linecap: round; }
.good .mark { stroke: var(--good); } .bad .mark { stroke: var(--bad); } .open .mark { stroke: var(--open); }
.cautions { list-style: none; margin: 0; padding: 0; }
.cautions li { padding: .6rem .9rem; margin: 0 0 .6rem; background: var(--faint); border-left: 5px solid var(--rule); }
.cautions li.error { border-left-color: var(--bad); } .cautions li.warning { border-left: 5px double var(--open); } .cautions li.note { border-left-style: dotted; }
.cautions p { margin: .1rem 0; max-width: none; overflow-wrap: anywhere; }
.cautions .kind { font-weight: 700; }
.hazards { border: 2px solid var(--ink); padding: .75rem 1rem .25rem 1rem; }
.hazards ul { margin: .25rem 0 .75rem; padding-left: 1.25rem; }
figure { margin: 0 0 1rem; break-inside: avoid; }
figcaption p { font-size: .92rem; color: var(--quiet); }
.plot { position: relative; width: 100%; overflow: hidden; }
.plot canvas { display: block; max-width: 100%; }
.plot img { max-width: 100%; height: auto; }
details { margin: .25rem 0 0; font-size: .92rem; }
summary { cursor: pointer; color: var(--link); }
.scroll { overflow-x: auto; margin: .5rem 0 1.25rem; }
table { border-collapse: collapse; font-size: .88rem; min-width: 60%; }
caption { text-align: left; font-weight: 600; padding: 0 0 .35rem; }
th, td { text-align: left; vertical-align: top; padding: .25rem .9rem .25rem 0; border-bottom: 1px solid var(--rule); }
thead th { border-bottom: 1.5px solid var(--ink); vertical-align: bottom; }
tbody th { font-weight: 400; color: var(--quiet); }
td { overflow-wrap: anywhere; min-width: 5rem; }
dl.words { display: grid; grid-template-columns: 8.5rem 1fr; gap: .3rem 1rem; margin: 0; }
dl.words dt { font-weight: 700; } dl.words dd { margin: 0; }
footer { margin-top: 2.5rem; padding-bottom: 2rem; font-size: .88rem; color: var(--quiet); }
@media (max-width: 40rem) {
  header, main, footer { padding-left: .8rem; padding-right: .8rem; }
  h1 { font-size: 1.35rem; }
  .plate { grid-template-columns: repeat(2, 1fr); }
  .verdict li, dl.words { grid-template-columns: 1fr; }
  dl.words dd { margin-bottom: .4rem; }
}
@media print {
  :root { color-scheme: light; --paper: #ffffff; --ink: #000000; --quiet: #333333; --rule: #999999; --faint: #ffffff; --good: #000000; --bad: #000000; --open: #000000; --link: #000000; }
  @page { margin: 16mm 14mm; }
  body { font-size: 10pt; }
  .skip, nav, details { display: none; }
  header, main, footer { max-width: none; padding: 0; }
  h2, h3, caption { break-after: avoid; }
  li, tr, .plate { break-inside: avoid; }
  .scroll { overflow: visible; }
  .cautions li { border: 1px solid var(--rule); border-left-width: 5px; }
  a { text-decoration: none; }
}
`.trim();
