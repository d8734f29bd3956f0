import { SCRIPTED } from "./styles-page.ts";

/**
 * The page's style sheet: system type, one accent, light and dark, narrow and wide, paper.
 *
 * Maps stay on light paper in the dark too: a colour must mean the same depth on every screen and in print.
 *
 * @param layerCount - number of map layers with a button, each with a rule that shows it when that is chosen
 * @param printFooter - text at the foot of every printed page; see {@link cssString}
 * @param mapAspect - width of the map through its height: on paper it is kept low enough for the first page
 */
export function styleSheet(layerCount: number, printFooter: string, mapAspect: number): string {
  const shown = Array.from({ length: layerCount }, (_, i) => i);
  return `${BASE}
${shown.map((i) => `#show-${i}:checked~.map-body .layer-${i}`).join(",")}{display:revert}
${SCRIPTED}
${PRINT}
@media print{.map-sheet{width:min(100%,${Math.round(PRINTED_MAP_MM * mapAspect)}mm)}}
@page{size:A4;margin:16mm 15mm 20mm;@bottom-left{content:${cssString(printFooter)};font:8pt ${FONT};color:#444;border-top:.5pt solid #999;padding-top:2mm;vertical-align:top;width:82%}@bottom-right{content:"Page " counter(page) " of " counter(pages);font:8pt ${FONT};color:#444;border-top:.5pt solid #999;padding-top:2mm;vertical-align:top;width:18%}}`;
}

/**
 * Text as a CSS string inside a style element: all but letters, digits and a few signs become escapes, so
 * that it can end neither the string nor the element.
 */
export function cssString(text: string): string {
  const escaped = Array.from(text, (character) =>
    /[A-Za-z0-9 .,:\-_]/.test(character) ? character : `\\${(character.codePointAt(0) ?? 0).toString(16)} `,
  );
  return `"${escaped.join("")}"`;
}

/** What the opening leaves of an A4 page with cells of trust of five lines and four cautions. */
const PRINTED_MAP_MM = 102;

const FONT = `system-ui,-apple-system,"Segoe UI",Roboto,"Helvetica Neue",Arial,sans-serif`;

const DARK =
  "--page:#14181b;--panel:#1b2024;--ink:#e6e8e6;--soft:#a3adb3;--line:#343b40;--accent:#7cc0d6;--warn:#f0c07c;--warn-bg:#2a2317;--warn-line:#6b5429;--gauge:#5fa9c4;--radar:#f0a04b;--adjusted:#d795cb;--hatch:#6b757b;--final:#7fcf9f";

/** A rule for dark pages: where the system is dark and the reader did not choose light, or where the reader chose dark. */
function inTheDark(selectors: string, rules: string): string {
  const under = (root: string) =>
    selectors
      .split(",")
      .map((selector) => `${root} ${selector}`.trim())
      .join(",");
  return `@media screen and (prefers-color-scheme:dark){${under(":root:not([data-theme=light])")}{${rules}}}
@media screen{${under(":root[data-theme=dark]")}{${rules}}}`;
}

const BASE = `:root{color-scheme:light dark}
:root[data-theme=light]{color-scheme:light}
:root[data-theme=dark]{color-scheme:dark}
:root{--page:#fbfaf8;--panel:#fff;--ink:#1c2227;--soft:#5b656d;--line:#dcdad4;--accent:#1d5a6e;--warn:#8a4b08;--warn-bg:#fdf4e6;--warn-line:#e3b778;--gauge:#2f6f86;--radar:#c4620a;--adjusted:#8b3f7f;--hatch:#a3a9ad;--final:#1f6b45}
${inTheDark("", DARK)}
*{box-sizing:border-box}
html{-webkit-text-size-adjust:100%;text-size-adjust:100%}
body{margin:0;background:var(--page);color:var(--ink);font:16px/1.5 ${FONT};font-variant-numeric:tabular-nums;overflow-wrap:anywhere}
header,main,footer{max-width:1180px;margin:0 auto;padding:0 24px}
header{padding-top:36px}
section{margin:56px 0 0;min-width:0}
h1{font-size:1.7rem;line-height:1.2;font-weight:650;letter-spacing:-.01em;margin:0}
h2{font-size:1.25rem;line-height:1.3;font-weight:650;margin:0 0 10px}
h3{font-size:1rem;font-weight:650;margin:28px 0 6px}
p{margin:0 0 12px}
a{color:var(--accent)}
:focus-visible{outline:2px solid var(--accent);outline-offset:2px}
.lead,section>ul,section>ol{max-width:76ch}
.lead,.small,.sub,figcaption,caption,.aside{color:var(--soft)}
.small{font-size:.85rem}
.heard{position:absolute;width:1px;height:1px;overflow:hidden;clip-path:inset(50%);white-space:nowrap}
.title-block{display:flex;flex-wrap:wrap;align-items:baseline;justify-content:space-between;gap:8px 24px;border-bottom:1px solid var(--line);padding-bottom:14px}
.standing{display:flex;flex-wrap:wrap;align-items:center;gap:4px 16px;margin:0;font-size:.9rem;color:var(--soft)}
.badge{border:1.5px solid currentColor;border-radius:4px;padding:1px 9px;font-weight:650;font-size:.8rem;color:var(--warn)}
.badge.final{color:var(--final)}
.headline{font-size:1.32rem;line-height:1.45;margin:22px 0 20px;max-width:74ch}
.headline .aside{font-size:1rem}
.headline strong{font-weight:700;white-space:nowrap}
.trust{display:grid;grid-template-columns:repeat(4,1fr);gap:0;margin:0;border:1px solid var(--line);border-radius:8px;background:var(--panel)}
.trust div{padding:12px 16px;border-left:1px solid var(--line)}
.trust div:first-child{border-left:0}
.trust dt{font-size:.8rem;color:var(--soft)}
.trust dd{margin:0}
.trust b{display:block;font-size:1.1rem;font-weight:650}
.trust span{display:block;font-size:.85rem;line-height:1.4;color:var(--soft)}
.cautions{margin:18px 0 0;padding:12px 18px;border:1px solid var(--warn-line);border-left-width:4px;border-radius:8px;background:var(--warn-bg)}
.cautions h2{font-size:1rem;margin:0 0 4px;color:var(--warn)}
.cautions ol,.cautions p{margin:0;padding-left:20px;max-width:110ch}
.cautions li{margin:3px 0}
.cautions p{padding-left:0;margin-top:6px;font-size:.9rem}
.cautions strong,#limits strong{font-weight:600}
#map{margin-top:32px}
.contents{margin-top:36px}
.contents ul{list-style:none;display:flex;flex-wrap:wrap;gap:4px 18px;margin:0;padding:10px 0;border:solid var(--line);border-width:1px 0;font-size:.9rem}
.map-block{border:0;margin:0;padding:0;min-width:0}
.map-block>legend{float:left;padding:0;margin-right:14px;color:var(--soft);font-size:.9rem}
.map-block>input{margin:0 6px 0 0;vertical-align:-1px;accent-color:var(--accent)}
.map-block>label{margin-right:18px;font-size:.9rem;display:inline-block;max-width:calc(100% - 40px)}
.map-body{clear:both;margin-top:12px;display:grid;grid-template-columns:minmax(0,1fr) 230px;gap:24px}
.map-sheet{background:#fdfdfb;border:1px solid var(--line);border-radius:8px;padding:6px;align-self:start}
.map-side h3{margin:0 0 6px;display:flex;justify-content:space-between;gap:8px}
.map-side h3 span{white-space:nowrap;font-weight:400;color:var(--soft);text-align:right}
.map-side p{font-size:.85rem;color:var(--soft);margin:8px 0 14px}
.layer,.legend{display:none}
.legend ul,.places-legend,.key,.tally{list-style:none;margin:0;padding:0}
.legend li,.places-legend li{display:flex;align-items:center;gap:8px;font-size:.88rem;line-height:1.65}
.places-legend{border-top:1px solid var(--line);padding-top:10px}
.legend .swatch{background:#fdfdfb}
.swatch{flex:none;max-width:none;vertical-align:-2px;overflow:visible}
.swatch-frame{stroke:#8b9297;stroke-width:1}
.swatch-frame.hollow{fill:none}
svg{display:block;max-width:100%}
svg.map,svg.chart{width:100%;height:auto}
svg.swatch{display:inline-block}
svg text{font:12px ${FONT};font-variant-numeric:tabular-nums;fill:var(--soft)}
.axis path,.axis .frame,.base{stroke:var(--soft);stroke-width:1;fill:none}
.axis .grid-line{stroke:var(--line);stroke-width:1}
.axis .quiet{opacity:.75}
.map .paper{fill:#fdfdfb}
.map text{fill:#4b545a}
.map .axis path,.map .axis .frame{stroke:#6b757b}
.map .axis .grid-line{stroke:#1c2227;stroke-opacity:.09}
.cells{image-rendering:pixelated}
.hatch-line{stroke:var(--hatch);stroke-width:1.6;fill:none}
.map .hatch-line,.legend .hatch-line{stroke:#b4b9bc}
.tile{stroke:#1c2227;stroke-opacity:.55;stroke-width:1.1;fill:none}
.catchments path{fill:none;stroke-linejoin:round}
.catchments .casing{stroke:#fff;stroke-width:3.4;stroke-opacity:.75}
.catchments .outline{stroke:#1c2227;stroke-width:1.3}
.places-legend .outline{fill:none;stroke:var(--ink);stroke-width:1.3}
.map .catchment-names text{font-weight:600;font-size:13px;fill:#1c2227;paint-order:stroke;stroke:#fff;stroke-width:3.5px;stroke-opacity:.85}
.map .gauge-label,.map .radar-label{font-size:11px;fill:#1c2227;paint-order:stroke;stroke:#fff;stroke-width:3px;stroke-opacity:.85}
.map .radar-label{font-weight:650}
.scatter .gauge-label{font-size:11px;paint-order:stroke;stroke:var(--panel);stroke-width:3px}
.gauge{stroke-width:1.5}
.gauge.used{fill:#fff;stroke:#14171a;stroke-width:1.8}
.gauge.doubted{fill:#e8730c;stroke:#14171a}
.gauge.left-out{fill:none;stroke:#a0246f;stroke-width:2.4;stroke-linecap:round}
.gauge .casing{stroke:#fff;stroke-width:5}
.scatter .gauge.used,.role .gauge.used,.places-legend .gauge.used{fill:var(--gauge);stroke:var(--panel);stroke-width:1}
.map .gauge.used,.places-legend .gauge.used{fill:#fff;stroke:#14171a;stroke-width:1.8}
${inTheDark(".scatter .gauge .casing,.role .gauge .casing,.places-legend .gauge .casing", "stroke:none")}
${inTheDark(".scatter .left-out,.role .left-out,.places-legend .left-out", "stroke:#ee8fc6")}
.radar{fill:none;stroke:#14171a;stroke-width:1.5}
.radar .casing{fill:#fff;fill-opacity:.8;stroke:none}
.radar .dot{fill:#14171a}
.backing{fill:#fff;fill-opacity:.82}
.scale-bar path{fill:none;stroke:#1c2227;stroke-width:1.5}
.north path{fill:#1c2227}
.map .scale-bar text,.map .north text{fill:#1c2227}
.beside{display:grid;grid-template-columns:minmax(0,5fr) minmax(0,6fr);gap:28px;align-items:start}
figure{margin:0;min-width:0}
figcaption{font-size:.85rem;margin:4px 0 0}
.beside figure+figure{margin-top:24px}
.equal{stroke:var(--ink);stroke-width:1.4;fill:none}
.factor{stroke:var(--soft);stroke-width:1.2;stroke-dasharray:5 4;fill:none}
.multiples{display:grid;grid-template-columns:repeat(auto-fill,minmax(min(100%,320px),1fr));gap:22px 28px;margin-top:14px}
.multiple figcaption{margin:0 0 2px}
.multiple span{display:block}
.multiple b{color:var(--ink);font-weight:600}
.key,.tally{display:flex;flex-wrap:wrap;gap:2px 20px;font-size:.85rem;color:var(--soft)}
.key li{display:flex;align-items:center;gap:7px}
.bars{stroke:none}
.bars.gauge{fill:var(--gauge)}
.bars.radar{fill:var(--radar);fill-opacity:.55}
.bars.adjusted,.bars.held-out{fill:var(--adjusted)}
.step-line{fill:none;stroke-width:1.6}
.step-line.radar{stroke:var(--radar)}
.step-line.adjusted,.step-line.held-out{stroke:var(--adjusted)}
.step-line.gauge{stroke:var(--gauge)}
.cut{font-size:11px;font-weight:600}
.scroll{position:relative;overflow:auto;max-width:100%;border:1px solid var(--line);border-radius:8px;background:var(--panel);overflow-wrap:normal}
.scroll.tall{max-height:480px}
.beside .tall{max-height:1060px}
.beside .tall th,.beside .tall td{padding-left:8px;padding-right:8px}
table{border-collapse:collapse;width:100%;font-size:.88rem;line-height:1.4}
caption{text-align:left;padding:9px 12px;font-size:.97em}
th,td{text-align:left;vertical-align:top;padding:6px 12px;border-top:1px solid var(--line);font-weight:400}
thead th{font-size:.92em;color:var(--soft);font-weight:600;vertical-align:bottom}
thead .number{white-space:normal}
.tall thead th{position:sticky;top:0;background:var(--panel);box-shadow:inset 0 -1px var(--line)}
tbody th{min-width:8.5em}
.number{text-align:right;white-space:nowrap}
.main,.id{font-weight:650}
.sub{display:block;font-size:.9em}
.number .sub,.id+.sub{white-space:nowrap}
.words{min-width:16ch;overflow-wrap:anywhere}
.scores th[scope=row]{min-width:24ch}
.scores td{min-width:16ch}
.role,.name{white-space:nowrap}
.evidence{width:36%}
.role .swatch{margin-right:6px}
.mark{font-size:.85em;font-weight:600;color:var(--warn);border:1px solid var(--warn-line);border-radius:3px;padding:0 4px;white-space:nowrap}
.missing{color:var(--soft)}
.chart-column{width:28%;min-width:90px}
.bar-cell{width:100%;height:14px;margin-top:3px}
.bar{fill:var(--hatch)}
.bar.in-use{fill:var(--radar)}
.facts{margin:0 0 16px}
.facts div{display:grid;grid-template-columns:9em minmax(0,1fr);gap:12px;padding:3px 0}
.facts dt,.glossary dt{color:var(--soft)}
.facts dd,.glossary dd{margin:0}
.digest,code{font-family:ui-monospace,Consolas,"Liberation Mono",monospace;font-size:.85em}
.glossary{display:grid;grid-template-columns:repeat(auto-fill,minmax(min(100%,340px),1fr));gap:12px 32px;font-size:.92rem;margin:0}
.glossary dt{font-weight:600;color:var(--ink)}
summary{cursor:pointer;font-size:.85rem;color:var(--accent);padding:4px 0;width:fit-content}
footer{margin-top:56px;padding-top:14px;padding-bottom:36px;font-size:.85rem;color:var(--soft)}
@media (max-width:900px){.map-body,.beside{grid-template-columns:minmax(0,1fr)}.trust{grid-template-columns:1fr 1fr}.trust div:nth-child(3){border-left:0}.trust div:nth-child(n+3){border-top:1px solid var(--line)}.legend ul,.places-legend{display:flex;flex-wrap:wrap;gap:0 18px}}
@media (max-width:560px){header,main,footer{padding-left:16px;padding-right:16px}header{padding-top:22px}section{margin-top:44px}h1{font-size:1.4rem}.headline{font-size:1.14rem}.trust div{padding:10px 12px}.map-block>legend{float:none;margin-bottom:2px}.map-block>input{float:left;clear:left;margin-top:5px}.map-block>label{display:block;margin-left:24px;line-height:1.75}.map-sheet{margin:0 -8px;padding:2px}svg.map text{font-size:22px}.map .gauge-label,.map .axis-title{display:none}.map .gauge>*,.map .radar>*{transform:scale(1.7)}.map .catchment-names text{font-size:22px}.map .radar-label{font-size:20px}.scatter text{font-size:14px}.facts div{grid-template-columns:1fr;gap:0}}`;

const PRINT = `@media print{:root,:root[data-theme]{color-scheme:light;--page:#fff;--panel:#fff;--ink:#111;--soft:#444;--line:#c9c9c9;--accent:#111;--warn:#6b3a05;--warn-bg:#fff;--warn-line:#b98436;--gauge:#2f6f86;--radar:#c4620a;--adjusted:#8b3f7f;--hatch:#8e9498;--final:#1f6b45}
body{font-size:9.5pt;line-height:1.4;-webkit-print-color-adjust:exact;print-color-adjust:exact}
header,main{max-width:none;padding:0}
header{padding-top:0}
.small,figcaption,.key,.lead{font-size:8.5pt}
footer,.contents,.screen-only,.map-block>legend,.map-block>input,.map-block>label,details{display:none}
section{margin-top:22pt}
h1{font-size:17pt}h2{font-size:13pt;break-after:avoid}h3{break-after:avoid}
.headline{font-size:12.5pt;margin:10pt 0}
.trust{grid-template-columns:repeat(4,1fr)}
.trust div,.trust div:nth-child(n+3){border-top:0;border-left:1px solid var(--line);padding:5pt 8pt}
.trust div:first-child{border-left:0}
.trust b{font-size:11pt}
.cautions{padding:6pt 10pt;margin-top:9pt;break-inside:avoid}
#map{margin-top:10pt}.map-sheet,.map-side{break-inside:avoid}
.lead,.key,caption,thead,tbody tr:first-child{break-after:avoid}
p,li{break-inside:avoid}
.map-body{grid-template-columns:minmax(0,1fr) 112pt;gap:10pt;margin-top:2pt}
.map-side p{font-size:7pt;margin:3pt 0 5pt}
.map-side h3{font-size:9pt;margin:0 0 2pt}
.places-legend{padding-top:4pt}
.legend ul,.places-legend{display:block}
.legend li,.places-legend li{font-size:7.5pt;line-height:1.35;gap:5pt}
.beside{display:block}
.beside>div:first-child{display:grid;grid-template-columns:1fr 1fr;gap:14pt;break-inside:avoid;margin-bottom:10pt}
.beside figure+figure{margin-top:0}
.multiples{grid-template-columns:1fr 1fr 1fr;gap:10pt 12pt}
.multiple,tr,.glossary div,.cautions li{break-inside:avoid}
.scroll,.scroll.tall{overflow:visible;max-height:none;border:0;border-bottom:1px solid var(--line);border-radius:0}
.tall thead th{position:static;box-shadow:none}
thead{display:table-header-group}
table{font-size:8.5pt}
th,td,caption{padding:3pt 8pt 3pt 0}
.words{min-width:11ch}.evidence{width:46%}.scores th[scope=row],.scores td{min-width:0}
.glossary{grid-template-columns:1fr 1fr}}`;
