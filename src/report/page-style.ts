/** The report's look. System fonts alone; colours as variables, so that dark mode and print change them in one place. */
export const PAGE_STYLE = `
:root {
  color-scheme: light dark;
  --paper: #fbfbfa; --raised: #ffffff; --ink: #1d242b; --soft: #5a636c; --rule: #d9dde0; --accent: #1b5e8c;
  --sound: #1d6b45; --caution: #8a5a00; --unsound: #a1282d; --data: #1b5e8c; --law: #c2571a; --trap: #8a1c5b;
  --sans: system-ui, -apple-system, "Segoe UI", Roboto, "Helvetica Neue", "Liberation Sans", Arial, sans-serif;
}
@media (prefers-color-scheme: dark) {
  :root {
    --paper: #15191d; --raised: #1c2126; --ink: #e4e8eb; --soft: #a1abb4; --rule: #373f46; --accent: #7db9e4;
    --sound: #6fc79b; --caution: #e0b04f; --unsound: #f0898c; --data: #6fb2e2; --law: #ec8a4d; --trap: #e08cc0;
  }
}
* { box-sizing: border-box; }
html { -webkit-text-size-adjust: 100%; }
body {
  margin: 0; background: var(--paper); color: var(--ink);
  font: 16px/1.55 var(--sans); font-variant-numeric: lining-nums tabular-nums; overflow-wrap: break-word;
}
main, .top, footer { max-width: 76rem; margin: 0 auto; padding: 0 1.5rem; }
h1, h2, h3 { line-height: 1.25; font-weight: 600; margin: 0; text-wrap: balance; }
h1 { font-size: 1.25rem; overflow-wrap: anywhere; }
h2 { font-size: 1.05rem; }
h3 { font-size: 0.95rem; margin: 0 0 0.5rem; }
p { margin: 0 0 0.75rem; max-width: 44rem; }
a { color: var(--accent); }
:focus-visible { outline: 3px solid var(--accent); outline-offset: 3px; border-radius: 2px; }
.skip { position: absolute; left: -999rem; }
.skip:focus { left: 1rem; top: 0.5rem; background: var(--raised); padding: 0.3rem 0.6rem; z-index: 1; }
.top { padding-top: 1.6rem; padding-bottom: 1rem; display: flex; flex-wrap: wrap; gap: 0.1rem 1.5rem; align-items: baseline; }
.top p, .soft { color: var(--soft); font-size: 0.9rem; margin: 0; }

.verdict { border-top: 4px solid var(--level); padding-top: 1.1rem; }
.sound { --level: var(--sound); } .caution { --level: var(--caution); } .unsound { --level: var(--unsound); }
.call { display: flex; flex-wrap: wrap; gap: 0.2rem 0.8rem; align-items: baseline; font-size: 1.15rem; margin: 0; max-width: none; }
.call span { font-weight: 400; }
.call strong { color: var(--level); font-size: 1.6rem; font-weight: 650; letter-spacing: -0.01em; }
.numbers { display: grid; grid-template-columns: repeat(auto-fit, minmax(15rem, 1fr)); gap: 1px; margin: 1.3rem 0 1.6rem; background: var(--rule); border: 1px solid var(--rule); }
.number { background: var(--raised); padding: 0.9rem 1rem 0.8rem; }
.number dt { color: var(--soft); font-size: 0.88rem; }
.number dd { margin: 0; }
.number .value { font-size: 1.45rem; line-height: 1.35; font-weight: 550; white-space: nowrap; letter-spacing: -0.01em; }
.number .value small { font-size: 0.62em; font-weight: 400; letter-spacing: 0; }
.number .missing { font-size: 1rem; font-weight: 400; white-space: normal; }
.number .range { font-size: 0.88rem; }
.reasons { list-style: none; margin: 0; padding: 0; display: grid; gap: 0.9rem; max-width: 56rem; }
.reasons li { padding-left: 1rem; border-left: 3px solid var(--level, var(--rule)); }
.reasons p { margin: 0; max-width: none; }
.reasons .code { font-weight: 600; }
.reasons .tag { color: var(--level, var(--soft)); font-size: 0.82rem; font-weight: 600; margin-left: 0.4rem; }
.advice::before { content: "→ "; color: var(--soft); }
.note { --level: var(--rule); }
.note .tag { color: var(--soft); }

section { padding: 1.9rem 0 0.4rem; }
section + section { margin-top: 1.2rem; border-top: 1px solid var(--rule); }
section > h2 { margin-bottom: 0.9rem; }
@media (min-width: 62rem) {
  .candidates tbody th { min-width: 11.5rem; }
  .candidates th, .candidates td { padding-right: 0.8rem; }
  section.ruled { display: grid; grid-template-columns: 11rem minmax(0, 1fr); column-gap: 2rem; }
  section.ruled > h2 { grid-column: 1; grid-row: 1 / span 40; position: sticky; top: 1rem; align-self: start; }
  section.ruled > * { grid-column: 2; }
  .pair { display: grid; grid-template-columns: 1fr 1fr; gap: 2rem; }
}
figure { margin: 0; min-width: 0; }
figcaption { color: var(--soft); font-size: 0.88rem; margin-top: 0.4rem; max-width: 44rem; }
.figure { display: block; width: 100%; height: auto; max-width: 38rem; }
.figure [fill="#1b5e8c"] { fill: var(--data); } .figure [stroke="#1b5e8c"] { stroke: var(--data); }
.figure [stroke="#8a1c5b"] { stroke: var(--trap); }
.figure [fill="#c2571a"] { fill: var(--law); } .figure [stroke="#c2571a"] { stroke: var(--law); }

table { border-collapse: collapse; font-size: 0.92rem; }
th, td { text-align: left; padding: 0.3rem 1.1rem 0.3rem 0; vertical-align: baseline; border-bottom: 1px solid var(--rule); }
thead th { font-weight: 600; border-bottom-color: var(--soft); }
tbody th { font-weight: 400; }
.scroll th, .scroll td { overflow-wrap: normal; }
.candidates thead th { white-space: normal; vertical-align: bottom; }
sub, sup { line-height: 0; }
.scroll + p.soft { max-width: 52rem; margin: -0.4rem 0 1.2rem; }
.formula { white-space: nowrap; }
td.n, th.n { text-align: right; white-space: nowrap; }
tr.chosen th, tr.chosen td { font-weight: 600; }
caption { text-align: left; font-weight: 600; padding-bottom: 0.35rem; }
.scroll { overflow-x: auto; max-width: 100%; margin-bottom: 1.2rem; }
.scroll.tall { max-height: 30rem; overflow-y: auto; }
.scroll.tall thead th { position: sticky; top: 0; background: var(--paper); }
.tables { display: grid; grid-template-columns: repeat(auto-fit, minmax(min(20rem, 100%), 1fr)); gap: 0.6rem 2.5rem; align-items: start; }
.quote { background: var(--raised); border: 1px solid var(--rule); padding: 1rem 1.2rem; max-width: 52rem; }
.quote p { max-width: none; }
.quote p:last-child { margin: 0; }
details > summary { cursor: pointer; color: var(--accent); margin-bottom: 0.6rem; }

.controls { display: grid; grid-template-columns: auto 1fr auto; gap: 0.3rem 0.6rem; align-items: center; margin-bottom: 0.9rem; }
.controls label.wide, .controls .live { grid-column: 1 / -1; }
.controls input[type="range"] { width: 100%; min-width: 0; height: 2rem; accent-color: var(--accent); }
.controls button { font: inherit; min-width: 2.4rem; min-height: 2.4rem; color: var(--ink); background: var(--raised); border: 1px solid var(--soft); border-radius: 4px; cursor: pointer; }
.choice { grid-column: 1 / -1; border: 0; margin: 0; padding: 0; display: flex; flex-wrap: wrap; gap: 0.1rem 1.2rem; }
.choice legend { float: left; padding: 0; margin-right: 1rem; }
.choice input { accent-color: var(--accent); }
.live { font-weight: 600; margin: 0; max-width: none; }
.maps { display: grid; grid-template-columns: repeat(3, minmax(0, 1fr)); gap: 1rem; }
#viewer h3 { margin: 1.4rem 0 0.3rem; }
#viewer h3 + p { margin-bottom: 0.7rem; max-width: 52rem; }
.sums { align-items: end; max-width: 46rem; margin-bottom: 1.6rem; }
.sums figcaption span { display: block; font-weight: 400; }
.maps figcaption { margin: 0 0 0.3rem; color: var(--ink); font-weight: 600; }
.screen { position: relative; background: var(--rule); }
.screen canvas { display: block; width: 100%; image-rendering: pixelated; }
.screen svg { position: absolute; inset: 0; width: 100%; height: 100%; overflow: hidden; }
.outline { fill: none; stroke: #fff; stroke-width: 1.5px; vector-effect: non-scaling-stroke; }
#residual-over .outline { stroke: #1d242b; }
.bar { stroke: #fff; stroke-width: 4px; vector-effect: non-scaling-stroke; }
.trace .screen canvas { height: 19rem; }
.ramp { display: grid; grid-template-columns: auto 1fr auto; gap: 0.5rem; align-items: center; font-size: 0.82rem; margin-top: 0.5rem; }
.ramp canvas { width: 100%; height: 0.7rem; }
.ramp span:last-child { grid-column: 1 / -1; color: var(--soft); }
.beside { display: grid; grid-template-columns: repeat(auto-fit, minmax(min(17rem, 100%), 1fr)); gap: 1rem 1.5rem; margin-top: 1.1rem; align-items: start; }
.cut { width: 100%; max-width: 30rem; height: auto; display: block; font-size: 13px; fill: var(--ink); }
.cut .axes { fill: none; stroke: var(--soft); stroke-opacity: 0.5; }
.cut .data { fill: var(--data); }
.cut .law { fill: none; stroke: var(--law); stroke-width: 2; }
footer { color: var(--soft); font-size: 0.85rem; padding-top: 1.5rem; padding-bottom: 3rem; overflow-wrap: anywhere; }
footer p { max-width: none; margin-bottom: 0.3rem; }

@media (max-width: 40rem) {
  main, .top, footer { padding-left: 1rem; padding-right: 1rem; }
  .maps { gap: 0.6rem; }
  .choice legend { float: none; }
  .candidates thead th { white-space: nowrap; }
  .sums figcaption span { font-size: 0.8rem; }
  .frame-maps { grid-template-columns: 1fr 1fr; }
  .map .frame-maps > :last-child, .trace .sums > :last-child { grid-column: 1 / -1; }
  .number { padding: 0.7rem 0.9rem; }
  .scroll table { font-size: 0.85rem; }
}
@media print {
  :root { color-scheme: light; --paper: #fff; --raised: #fff; --ink: #000; --soft: #444; --rule: #bbb; --accent: #000; --sound: #1d6b45; --caution: #8a5a00; --unsound: #a1282d; --data: #1b5e8c; --law: #c2571a; --trap: #8a1c5b; }
  @page { margin: 16mm 14mm; }
  body { font-size: 10pt; }
  main, .top, footer { padding-left: 0; padding-right: 0; max-width: none; }
  .controls > :not(.live), .skip, summary { display: none; }
  .scroll, .scroll.tall { overflow: visible; max-height: none; }
  .numbers { grid-template-columns: repeat(4, 1fr); margin: 0.8rem 0; }
  .number { padding: 0.5rem 0.6rem; }
  .number .value { font-size: 12pt; }
  .number dt, .number .range, figcaption, table, .ramp, section .soft { font-size: 8pt; }
  .pair { display: grid; grid-template-columns: 1fr 1fr; gap: 1rem; }
  .reasons { gap: 0.5rem; }
  section { padding: 1rem 0 0; }
  .controls { break-after: avoid; margin-bottom: 0.4rem; }
  .tables table, .scroll:not(.tall) table, figure, .number, .reasons li, tr, .quote p, .maps, .beside { break-inside: avoid; }
  h2, h3, h3 + p, caption, .ruled > p { break-after: avoid; }
  .scroll + p.soft { break-after: auto; }
  .number .missing { font-size: 9pt; }
  #viewer ~ figure .figure { max-width: 26rem; }
  section + section { margin-top: 0.5rem; }
  footer { padding: 0.6rem 0 0; break-inside: avoid; }
  canvas { print-color-adjust: exact; -webkit-print-color-adjust: exact; }
  details::details-content { content-visibility: visible; height: auto; }
  .frames-table { font-size: 7.5pt; }
  .frames-table th, .frames-table td { padding-right: 0.4rem; white-space: normal; }
}
@media (prefers-reduced-motion: no-preference) { html { scroll-behavior: smooth; } }
`.trim();
