const FONT = `system-ui,-apple-system,"Segoe UI",Roboto,"Helvetica Neue",Arial,sans-serif`;

/** Style of the pages of places: a sheet of paper first, a screen second; light and dark. */
export const EVENT_STYLE = `:root{color-scheme:light dark;--page:#fbfaf8;--ink:#1c2227;--soft:#5b656d;--line:#dcdad4;--accent:#1d5a6e;--warn:#8a4b08;--gauge:#2f6f86;--radar:#c4620a;--adjusted:#8b3f7f;--hatch:#a3a9ad}
@media (prefers-color-scheme:dark){:root{--page:#14181b;--ink:#e6e8e6;--soft:#a3adb3;--line:#343b40;--accent:#7cc0d6;--warn:#f0c07c;--gauge:#5fa9c4;--radar:#f0a04b;--adjusted:#d795cb;--hatch:#6b757b}}
*{box-sizing:border-box}
body{margin:0 auto;max-width:960px;padding:28px 24px 40px;background:var(--page);color:var(--ink);font:15px/1.5 ${FONT};font-variant-numeric:tabular-nums;overflow-wrap:anywhere}
.of{margin:0 0 6px;max-width:none;display:flex;flex-wrap:wrap;gap:2px 18px;justify-content:space-between;color:var(--soft);font-size:.87rem}
h1{font-size:1.6rem;line-height:1.2;margin:0;padding-bottom:10px;border-bottom:3px solid var(--accent)}
h1 small{display:block;font-size:.95rem;font-weight:400;color:var(--soft);margin-top:4px}
h2{font-size:1.1rem;margin:30px 0 8px}
h3{font-size:1rem;margin:18px 0 4px}
p{margin:0 0 10px;max-width:82ch}
a{color:var(--accent)}
:focus-visible{outline:2px solid var(--accent);outline-offset:2px}
.headline{font-size:1.25rem;margin:16px 0 4px}
.headline strong{white-space:nowrap}
.small,figcaption,caption{color:var(--soft);font-size:.87rem}
.charts{display:grid;grid-template-columns:repeat(auto-fit,minmax(min(100%,320px),1fr));gap:22px 30px;align-items:start}
figure{margin:0;min-width:0}
svg{display:block;width:100%;height:auto}
svg text{font:12px ${FONT};fill:var(--soft)}
.axis path,.base{stroke:var(--soft);stroke-width:1;fill:none}
.axis .grid-line{stroke:var(--line)}
.axis .quiet{opacity:.75}
.hatch-line{stroke:var(--hatch);stroke-width:1.6;fill:none}
.bars{stroke:none}
.bars.gauge{fill:var(--gauge)}
.bars.radar{fill:var(--radar);fill-opacity:.6}
.bars.adjusted{fill:var(--adjusted);fill-opacity:.75}
.step-line{fill:none;stroke-width:1.5}
.step-line.radar{stroke:var(--radar)}
.step-line.gauge{stroke:var(--gauge)}
.step-line.adjusted{stroke:var(--adjusted)}
.cut{font-weight:600}
.period{fill:none;stroke:var(--soft);stroke-width:1;stroke-dasharray:1 3;stroke-linecap:round}
.period-name{font-size:11px}
.peak{fill:var(--adjusted);stroke:var(--page);stroke-width:1}
.interval{stroke:var(--adjusted);stroke-width:2.5;stroke-opacity:.5}
.bound{fill:none;stroke:var(--adjusted);stroke-width:1.6}
.scroll{overflow-x:auto}
table{border-collapse:collapse;font-size:.9rem;line-height:1.35}
caption{text-align:left;padding:0 0 4px}
th,td{text-align:left;vertical-align:top;padding:4px 14px 4px 0;border-top:1px solid var(--line);font-weight:400;white-space:nowrap}
thead th{border-top:0;color:var(--soft);vertical-align:bottom}
.n{text-align:right}
td.words{white-space:normal;min-width:9em}
ul{margin:8px 0 10px;padding-left:20px;max-width:82ch}
.caution{border-left:4px solid var(--warn);padding-left:14px}
.caution h2{color:var(--warn)}
.hands{display:grid;grid-template-columns:repeat(3,1fr);gap:24px;margin-top:34px}
.hands div{border-top:1px solid var(--ink);padding-top:4px;color:var(--soft);font-size:.85rem;margin-top:30px}
footer{margin-top:24px;color:var(--soft);font-size:.8rem}
@media print{:root{--page:#fff;--ink:#000;--soft:#444;--line:#bbb;--accent:#1d5a6e;--warn:#7a3d00;--gauge:#2f6f86;--radar:#c4620a;--adjusted:#8b3f7f}body{max-width:none;padding:0;font-size:10pt}a{color:inherit;text-decoration:none}figure,table,tr,.caution li{break-inside:avoid}h2,h3{break-after:avoid}.charts{grid-template-columns:1fr 1fr}.scroll{overflow:visible}th,td{padding-right:9px}}
@page{size:A4;margin:16mm 15mm}`;
