/// <reference path="./bundled.d.ts" />
import { createHash } from "node:crypto";
import { jsonForScript, pageData } from "./data/page-data.ts";
import type { ReportInput } from "./input.ts";
import { classLayers } from "./map/layer.ts";
import { mapFrame, mapSize } from "./map/map.ts";
import pageScript from "./page/main.ts?bundled";
import { catchmentSection, relationSection } from "./sections/catchments.ts";
import { echoSection } from "./sections/echo.ts";
import { scatterSection, verdictSection } from "./sections/gauges.ts";
import { hyetographSection } from "./sections/hyetographs.ts";
import { mapSection } from "./sections/map-section.ts";
import { methodSection } from "./sections/methods.ts";
import { firstCautions, headlineSentence, limitsSection, titleBlock, trustLine } from "./sections/opening.ts";
import { accountSection, glossarySection, provenanceSection } from "./sections/records.ts";
import { scoreSection } from "./sections/scores.ts";
import { styleSheet } from "./styles.ts";
import { html, Markup } from "./text/html.ts";

/** What stands below the map, in order: the words of the list of contents, the id, and what writes it. */
const SECTIONS: readonly {
  readonly id: string;
  readonly words: string;
  readonly write: (input: ReportInput) => Markup;
}[] = [
  { id: "gauges-radar", words: "Gauge against radar", write: scatterSection },
  { id: "time", words: "Rain against time", write: hyetographSection },
  { id: "relations", words: "Other relations", write: relationSection },
  { id: "catchments", words: "Catchments", write: catchmentSection },
  { id: "gauges", words: "Gauge verdicts", write: verdictSection },
  { id: "scores", words: "Scores", write: scoreSection },
  { id: "methods", words: "Ways to adjust", write: methodSection },
  { id: "echo", words: "From echo to rain", write: echoSection },
  { id: "accounts", words: "Left out and assumed", write: accountSection },
  { id: "provenance", words: "Provenance", write: provenanceSection },
  { id: "limits", words: "Cautions", write: limitsSection },
  { id: "glossary", words: "Words", write: () => glossarySection() },
];

/** A page stays below 5 MB, so that it can be sent: what the script is told is thinned to the room that is left. */
const MOST_BYTES = 4_900_000;

/** Digits of the run digest that are printed: enough to tell runs apart by eye. */
const DIGEST_DIGITS = 16;

/**
 * The report as one HTML file that needs nothing else: no network, no font.
 *
 * Everything it has to say stands in the page without script; the script makes the map and the tables answer, see
 * `page/`. The content policy in its head forbids everything but pictures inside the file, its own style sheet and
 * its own script. The same input gives the same bytes.
 *
 * @throws RangeError where the input contradicts itself: a layer that does not fill the grid or names a
 * radar that is not there, a zone that does not exist
 */
export function renderReport(input: ReportInput): string {
  const footer = footerText(input);
  const map = mapSize(mapFrame(input.grid));
  const buttons = input.layers.filter(({ group }) => group === undefined).length;
  const style = styleSheet(buttons, footer, map.width / map.height);
  const policy = `default-src 'none'; img-src data:; style-src 'sha256-${sha256(style)}'; script-src 'sha256-${sha256(pageScript)}'; base-uri 'none'; form-action 'none'`;
  const classed = classLayers(input.layers, input.grid.nx, input.grid.ny);
  const sections = SECTIONS.map((section) => ({ ...section, markup: section.write(input) })).filter(
    ({ markup }) => markup.text !== "",
  );
  const standing = html`<!doctype html>
<html lang="en">
<head>
<meta charset="utf-8">
<meta http-equiv="Content-Security-Policy" content="${policy}">
<meta name="viewport" content="width=device-width, initial-scale=1">
<meta name="referrer" content="no-referrer">
<title>${input.title}</title>
<style>${new Markup(style)}</style>
</head>
<body>
<header>
${titleBlock(input)}
${headlineSentence(input)}
${trustLine(input)}
${firstCautions(input)}
</header>
<main>
${mapSection(input, classed)}
<nav class="contents" aria-label="Contents"><ul>${sections.map(
    ({ id, words }) => html`<li><a href="#${id}">${words}</a></li>`,
  )}</ul></nav>
${sections.map(({ markup }) => html`${markup}\n`)}</main>
<footer>${footer}. ${input.provenance.software}.</footer>`;
  const room = MOST_BYTES - Buffer.byteLength(standing.text) - pageScript.length;
  const data = jsonForScript(pageData(input, classed, room));
  return html`${standing}
<script type="application/json" id="report-data">${new Markup(data)}</script>
<script>${new Markup(pageScript)}</script>
</body>
</html>
`.text;
}

function sha256(text: string): string {
  return createHash("sha256").update(text).digest("base64");
}

function footerText(input: ReportInput): string {
  const status = input.status === "final" ? "Final" : "Provisional";
  return `${status}: run ${input.provenance.runDigest.slice(0, DIGEST_DIGITS)}`;
}
