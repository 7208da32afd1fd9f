/** The report's look: the dashboard's daylight, on screen and on A4. */
export const PAGE_STYLE = `
:root {
  --ground: #F6F4EE; --ink: #1B2426; --soft: #5C6B6D; --hairline: #D5D2C6; --faint: #ECE9DF;
  --notice: #2B6CB0; --caution: #976500; --alarm: #B42318; --good: #11776E;
}
* { box-sizing: border-box; }
html { background: var(--ground); color: var(--ink); -webkit-print-color-adjust: exact; print-color-adjust: exact; }
body {
  max-width: 190mm; margin: 0 auto; padding: 10mm 6mm 16mm;
  font: 13px/1.45 "Inter", "Segoe UI", "Helvetica Neue", Arial, sans-serif; font-variant-numeric: tabular-nums;
}
h1, h2, h3, p, ul, table, figure, dl { margin: 0; }
h1 { font-size: 15px; font-weight: 600; }
h2 { font-size: 15px; font-weight: 600; }
section { margin-top: 8mm; padding-top: 3mm; border-top: 1px solid var(--hairline); }
.verdict { font-size: 44px; line-height: 1.1; font-weight: 650; letter-spacing: -0.01em; margin: 6mm 0 1mm; }
.verdict svg { width: 26px; height: 26px; margin-right: 10px; }
.go { color: var(--good); } .no-go, .failed { color: var(--alarm); } .incomplete, .not-done { color: var(--caution); }
.soft { color: var(--soft); } .small { font-size: 12px; } .bad { color: var(--alarm); font-weight: 650; }
svg { vertical-align: -1px; }
.reasons { list-style: none; padding: 0; margin-top: 2mm; }
.reasons li { padding: 1.2mm 0; border-top: 1px solid var(--faint); display: grid; grid-template-columns: 44mm 1fr; gap: 4mm; }
section .reasons li { grid-template-columns: 24mm 1fr; }
.caution { border-left: 3px solid var(--caution); padding-left: 3mm; margin-top: 3mm; max-width: 150mm; }
.facts { display: grid; grid-template-columns: max-content 1fr; column-gap: 6mm; row-gap: 0.6mm; margin-top: 3mm; }
.facts dt { color: var(--soft); } .facts dd { margin: 0; overflow-wrap: anywhere; }
.head { display: flex; justify-content: space-between; gap: 6mm; }
.step-head { display: flex; align-items: baseline; gap: 4mm; }
.step-head .state { margin-left: auto; font-size: 13px; font-weight: 600; }
table { border-collapse: collapse; min-width: 50%; margin-top: 3mm; font-size: 12px; }
th { text-align: left; font-weight: 500; color: var(--soft); vertical-align: bottom; padding: 0.8mm 5mm 0.8mm 0; }
td { padding: 0.8mm 5mm 0.8mm 0; border-top: 1px solid var(--faint); vertical-align: top; overflow-wrap: anywhere; }
.number { text-align: right; } th .limit { display: block; font-size: 11px; font-weight: 400; }
figure { margin-top: 3mm; } figure svg { display: block; width: 100%; height: auto; }
figcaption { font-size: 12px; color: var(--soft); margin-bottom: 1mm; }
.spheres { display: flex; flex-wrap: wrap; gap: 3mm 5mm; } .spheres div { width: 38mm; font-size: 12px; }
svg text { font: 11px "Inter", "Segoe UI", "Helvetica Neue", Arial, sans-serif; fill: var(--soft); }
svg text.name { fill: var(--ink); }
tr.out td { color: var(--soft); }
figure, li, tr, .caution, .intro, .facts { break-inside: avoid; }
h2, .intro, thead, figcaption { break-after: avoid; }
.hash { font-size: 11px; overflow-wrap: anywhere; }
@page { size: A4; margin: 15mm 14mm 16mm; }
@media print {
  html { background: #FFFFFF; } body { max-width: none; padding: 0; }
}
@media (max-width: 600px) { .reasons li, section .reasons li { grid-template-columns: 1fr; gap: 0; } .head { display: block; } table { display: block; overflow-x: auto; } }
`;
