/** The report's own style: paper and ink on a screen, ink alone on A4. */
export const REPORT_STYLE = `
:root{--paper:#f4f1e8;--raised:#faf8f2;--rule:#dbd6c7;--edge:#85806f;--ink:#1f2a36;--soft:#5a5b56;--pen:#2b5b5e;--red:#b32d19}
@media print{:root{--paper:#fff;--raised:#fff;--rule:#d8d8d8;--edge:#777;--ink:#000;--soft:#444}}
@page{size:A4;margin:16mm 15mm 18mm}
*{box-sizing:border-box}
html{background:var(--paper);color:var(--ink);font:14px/1.45 "Helvetica Neue",Helvetica,Arial,"Liberation Sans","Noto Sans",system-ui,sans-serif;font-variant-numeric:tabular-nums;-webkit-print-color-adjust:exact;print-color-adjust:exact}
body{margin:0 auto;max-width:820px;padding:36px 28px 60px}
h1,h2,p,ul,dl,dd,figure{margin:0;padding:0}
header{display:flex;justify-content:space-between;gap:24px;color:var(--soft);border-bottom:1px solid var(--edge);padding-bottom:6px}
h1{font-size:1.4em;line-height:1.3;font-weight:600;margin:12px 0 10px;text-wrap:pretty}
.verdict{display:inline-block;border:1.5px solid currentColor;border-radius:2px;padding:1px 9px;font-weight:600;margin-top:22px}
.lead{max-width:56em;text-wrap:pretty}
h2{font-size:1em;font-weight:600;margin:26px 0 8px;border-bottom:1px solid var(--rule);padding-bottom:3px;break-after:avoid}
.figures{display:flex;flex-wrap:wrap;justify-content:space-between;gap:6px 16px;margin:18px 0 4px}
.figures dt{color:var(--soft)}
.figures dd{font-size:1.45em;line-height:1.2;white-space:nowrap}
.figures dd small{display:block;font-size:.6em;color:var(--soft)}
.pair{display:grid;grid-template-columns:1fr 1fr;gap:8px 26px;margin-top:22px}
@media (max-width:620px){.pair{grid-template-columns:1fr}}
@media print{.pair{grid-template-columns:1fr 1fr}}
figure{break-inside:avoid}
figcaption{color:var(--soft);margin-bottom:4px}
svg{display:block;width:100%;height:auto;overflow:visible}
svg text{font-size:11px;fill:var(--soft)}
svg text.title,svg text.mark{fill:var(--ink)}
.edge{stroke:var(--edge);fill:none}.rule{stroke:var(--rule);fill:none}
.line{fill:none;stroke:var(--ink);stroke-linejoin:round}
.first{stroke-width:2.2}.second{stroke:var(--pen);stroke-width:1.6;stroke-dasharray:6 3}.third{stroke:var(--pen);stroke-width:1.6;stroke-dasharray:2 2 7 2}.best{stroke-width:1.3;stroke-dasharray:1.5 2.5}.thin{stroke:var(--edge);stroke-width:.6}
.chosen{fill:var(--raised);stroke:var(--ink);stroke-width:2.2}
.limit{stroke:var(--red);stroke-dasharray:5 3;fill:none}.least{stroke:var(--red);stroke-width:1.3;fill:none}.median{fill:var(--ink)}
.bar{fill:var(--pen)}.cell{fill:var(--pen)}.inCell{fill:var(--ink)}svg text.onCell{fill:#fff}.chosenCell{fill:none;stroke:var(--ink);stroke-width:2}
.legend{list-style:none;display:flex;flex-wrap:wrap;gap:2px 16px;color:var(--soft);font-size:.86em}
.legend svg{display:inline-block;width:30px;height:10px;margin-right:6px}
.note{color:var(--soft);font-size:.86em}
table{border-collapse:collapse;width:100%}
th,td{text-align:left;vertical-align:baseline;padding:3px 14px 3px 0;border-bottom:1px solid var(--rule)}
th{font-weight:400;color:var(--soft)}
tbody th{color:var(--ink)}
td.n,th.n{text-align:right;white-space:nowrap}
tr{break-inside:avoid}
.score th{white-space:nowrap}
tr.chosenRow th,tr.chosenRow td{font-weight:600}
.none{color:var(--soft)}
.hash{font-family:"DejaVu Sans Mono",Consolas,Menlo,monospace;font-size:.78em;overflow-wrap:anywhere}
.caution{margin-top:28px;border-left:3px solid var(--red);padding:2px 0 2px 12px;break-inside:avoid}
@media print{html{font-size:9pt}h1{font-size:1.3em}body{max-width:none;padding:0}section{break-inside:avoid}.verdict{margin-top:12px}h2{margin-top:14px}th,td{padding-top:2px;padding-bottom:2px}.pair{margin-top:14px}}
`;
