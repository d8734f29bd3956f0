/** Rules for what the page's script adds; all of it is under the class that the script gives to the page. */
export const SCRIPTED = `button,select{font:inherit;color:var(--ink);background:var(--panel);border:1px solid var(--soft);border-radius:5px;padding:3px 10px;min-height:30px;cursor:pointer;max-width:100%}
button:disabled{opacity:.55;cursor:default}
button:not(:disabled):hover{border-color:var(--accent);color:var(--accent)}
.page-tools{display:flex;flex-wrap:wrap;justify-content:flex-end;gap:4px 24px;margin:-14px 0 14px;font-size:.85rem;color:var(--soft)}
.page-tools fieldset{display:flex;flex-wrap:wrap;align-items:center;gap:2px 12px;border:0;margin:0;padding:0;min-width:0}
.page-tools legend{float:left;padding:0;margin-right:12px}
.page-tools label{display:flex;align-items:center;gap:5px;min-height:26px}
.page-tools input{margin:0;accent-color:var(--accent)}
.choice{display:inline-flex;align-items:center;gap:6px;margin:0 18px 2px 0;font-size:.9rem;max-width:100%}
.choice input{margin:0;accent-color:var(--accent)}
.map-stage{position:relative;touch-action:pan-y;cursor:crosshair;border-radius:4px}
.map-stage svg.map{position:relative}
.map-stage svg *,svg.scatter text{pointer-events:none}
.map-stage [data-place],.map-stage [data-place] *{pointer-events:all;cursor:pointer}
svg.scatter [data-place]{cursor:pointer}
.map-canvas{position:absolute}
.map-cursor{fill:none;stroke:#14171a;stroke-width:1.6;paint-order:stroke;pointer-events:none}
.map-tip{position:absolute;pointer-events:none;background:#14181b;color:#fff;font-size:.82rem;line-height:1.3;padding:3px 8px;border-radius:4px;white-space:pre;z-index:1}
.lit>*,.chosen>*{stroke-width:3}
.map .catchments .outline.lit{stroke-width:2.4}
.map .catchments .outline.chosen{stroke-width:3}
.gauge.chosen,.radar.chosen,.asset.chosen{outline:2px solid #14171a;outline-offset:3px;border-radius:50%}
.scatter .chosen{outline-color:var(--ink)}
.readout{margin:8px 4px 0;font-size:.88rem;line-height:1.4;min-height:2.8em;color:#1c2227}
.map-sheet .small{color:#4b545a;margin:6px 4px 2px}
.hint{display:none}
.map-stage:focus-visible~.hint{display:block}
.time-bar{display:flex;flex-wrap:wrap;align-items:center;gap:6px 8px;padding:8px 4px 4px;border-top:1px solid #dcdad4;margin-top:6px;color:#1c2227}
.time-bar button{color:#1c2227;background:#fff;border-color:#6b757b;font-size:.88rem}
.time-bar .play{min-width:5em}
.time-bar input{flex:1 1 140px;min-width:100px;accent-color:#1d5a6e}
.time-words{flex:1 0 100%;font-size:.88rem}
.hit.hit{fill:transparent;stroke:none}
.asset{fill:#fff;stroke:#14171a;stroke-width:1.6}
.asset .dot{fill:#14171a;stroke:none}
.map .asset-label{font-size:11px;fill:#1c2227;paint-order:stroke;stroke:#fff;stroke-width:3px;stroke-opacity:.85}
.live-legend ul{list-style:none;margin:0;padding:0;columns:2;column-gap:16px}
.live-legend li{display:flex;align-items:center;gap:8px;font-size:.88rem;line-height:1.65;break-inside:avoid}
.swatch-hatch{stroke:#b4b9bc;stroke-width:1.6;fill:none}
.live-legend .swatch{overflow:hidden}
.place-panel,.place-rain{margin:0;border:1px solid var(--line);border-radius:8px;background:var(--panel);padding:12px 14px;align-self:start;grid-column:1/-1}
.place-rain h3{margin:0 0 4px}
.finder{display:flex;flex-wrap:wrap;align-items:center;gap:4px 8px;margin:0 0 8px;font-size:.9rem}
.finder select{flex:1 1 180px;min-width:0}
.place-head{display:flex;justify-content:space-between;align-items:flex-start;gap:12px;margin:0 0 8px}
.place-head h3{margin:0;font-size:1.08rem}
.place-head .sub{font-weight:400;color:var(--soft)}
.place-facts{margin:0 0 8px;font-size:.9rem;line-height:1.4}
.place-facts div{display:grid;grid-template-columns:10.5em minmax(0,1fr);gap:10px;padding:3px 0;border-top:1px solid var(--line)}
.place-facts dt{color:var(--soft)}
.place-facts dd{margin:0}
.place-caution{font-size:.85rem;line-height:1.4;margin:0 0 6px;padding:4px 8px;border-left:3px solid var(--warn-line);background:var(--warn-bg)}
.series-figure{margin:12px 0 6px}
.series-holder{cursor:crosshair;touch-action:pan-y;border-radius:4px}
.series-words{font-size:.85rem;line-height:1.4;min-height:4.2em;margin:2px 0 4px}
.series .sum{stroke-width:2}
.series-cursor{stroke:var(--ink);stroke-width:1;fill:none}
.series .band{fill:var(--accent);fill-opacity:.14}
.range{stroke:var(--ink);stroke-width:1.5;fill:none}
.table-home{min-width:0}
.table-tools{display:flex;flex-wrap:wrap;align-items:center;gap:6px;margin:0 0 6px;font-size:.8rem;color:var(--soft)}
.table-tools button{padding:1px 8px;min-height:26px}
.sort{border:0;background:none;padding:0;min-height:24px;font:inherit;color:inherit;text-align:inherit;border-radius:2px}
.sort-sign::after{content:"\\2195";margin-left:4px;font-size:.9em;opacity:.6}
[aria-sort=ascending] .sort-sign::after{content:"\\2191";opacity:1}
[aria-sort=descending] .sort-sign::after{content:"\\2193";opacity:1}
@media (min-width:1081px){.scripted .places-legend{columns:2;column-gap:16px}.scripted .map-side>p{margin-bottom:0}.scripted .map-body{grid-template-columns:minmax(0,1fr) 392px;grid-template-rows:auto auto auto}.scripted .map-sheet{grid-row:1/3}.scripted .place-panel{grid-column:2;grid-row:2/4}.scripted .place-rain{grid-column:1;grid-row:3}}
@media (max-width:560px){.page-tools{justify-content:flex-start;margin-top:-6px}.page-tools fieldset{flex:1 0 100%}.choice{display:flex;min-height:28px;flex-wrap:wrap}.choice select{flex:1 1 100%}.place-facts div{grid-template-columns:1fr;gap:0}.readout{padding:0 6px}.time-bar{padding:8px 6px}}
@media print{.page-tools,.time-bar button,.time-bar input,.hint,.finder,.place-head button,.table-tools,.sort-sign,.map-cursor,.map-tip,.readout,.choice,.place-rain details{display:none}.time-bar{border:0;margin:0;padding:2pt 0 0}.place-panel{break-inside:avoid;margin-top:6pt}.place-panel:not(:has(.place-head)){display:none}.place-panel,.place-rain{grid-column:1/-1!important;grid-row:auto!important}.place-rain{break-inside:avoid;margin-top:6pt}.sort{display:contents}.time-words{font-size:8.5pt}.series-words{min-height:0}.live-legend ul{columns:1}.live-legend li{font-size:7.5pt;line-height:1.35;gap:5pt}.place-facts{font-size:8.5pt}}`;
