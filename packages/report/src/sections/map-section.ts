import { swatch } from "../charts/hatch.ts";
import { assetMark, gaugeMark, ROLE_WORDS, radarMark } from "../charts/marks.ts";
import type { GaugeRole, ReportInput, ReportRadar } from "../input.ts";
import { type ClassedLayer, type DrawnLayer, drawLayers } from "../map/layer.ts";
import { isOnMap, mapFrame, svgMap } from "../map/map.ts";
import { html, joined, type Markup } from "../text/html.ts";
import { countText } from "../text/numbers.ts";
import { projectionWords } from "../text/projection-words.ts";

const ROLES: readonly GaugeRole[] = ["used", "doubted", "left-out"];

/** The map with a plain button per layer: they work without any script. The script adds the rest, see `page/`. */
export function mapSection(input: ReportInput, classed: readonly ClassedLayer[]): Markup {
  const layers = drawLayers(classed, input.radars);
  if (layers.length === 0) return html``;
  const shown = Math.max(
    0,
    layers.findIndex(({ layer }) => layer.id === input.shownLayerId),
  );
  return html`<section id="map" aria-labelledby="map-heading"><h2 id="map-heading">Map</h2><fieldset class="map-block"><legend>Show</legend>${layers.map(
    ({ layer }, index) =>
      html`<input type="radio" name="map-layer" id="show-${index}"${index === shown && html` checked`}><label for="show-${index}">${layer.label}</label>`,
  )}<div class="map-body"><div class="map-sheet">${svgMap(input, layers)}</div><div class="map-side">${layers.map(
    (drawn, index) => legend(drawn, index),
  )}${placesLegend(input)}${mapNotes(input, layers)}</div></div></fieldset><noscript><p class="small screen-only">Where its script may run, this page shows further layers, each interval, values at a place, and tables that sort and copy.</p></noscript></section>`;
}

function legend(drawn: DrawnLayer, index: number): Markup {
  return html`<div class="legend layer-${index}"><h3>${drawn.layer.label}<span>${drawn.unit}</span></h3><ul>${drawn.legend.map(
    (entry) => html`<li>${entry.swatch}${entry.label}</li>`,
  )}</ul><p>${drawn.layer.what}</p></div>`;
}

function placesLegend(input: ReportInput): Markup {
  const roles = ROLES.filter((role) => input.gauges.some((gauge) => gauge.role === role));
  return html`<ul class="places-legend">${roles.map(
    (role) => html`<li>${swatch(gaugeMark(role, 11, 7, ""))}gauge ${ROLE_WORDS[role]}</li>`,
  )}${input.radars.some(standsSomewhere) && html`<li>${swatch(html`<g transform="scale(0.75)">${radarMark(14.7, 9.3, "")}</g>`)}radar</li>`}${
    input.assets !== undefined &&
    input.assets.length > 0 &&
    html`<li>${swatch(assetMark(11, 7, "", ""))}asset</li>`
  }${
    input.catchments.length > 0 &&
    html`<li>${swatch(html`<path class="outline" d="M2 11L7 3L16 4L20 11Z"/>`)}catchment</li>`
  }</ul>`;
}

function standsSomewhere({ xM, yM }: ReportRadar): boolean {
  return Number.isFinite(xM) && Number.isFinite(yM);
}

function mapNotes(input: ReportInput, layers: readonly DrawnLayer[]): Markup {
  const { grid } = input;
  const frame = mapFrame(grid);
  const outside = [
    ...input.radars
      .filter((radar) => standsSomewhere(radar) && !isOnMap(frame, radar))
      .map(({ id }) => `radar ${id}`),
    ...input.gauges.filter((gauge) => !isOnMap(frame, gauge)).map(({ id }) => `gauge ${id}`),
    ...(input.assets ?? []).filter((asset) => !isOnMap(frame, asset)).map(({ id }) => `asset ${id}`),
  ];
  const block = layers[0].picture.block;
  const cellKm = grid.cellM / 1000;
  return html`<p class="small">${grid.nx} × ${grid.ny} cells of ${cellKm} km. ${
    block > 1 &&
    html`Drawn thinned, ${block} × ${block} cells to one of ${block * cellKm} km: the mean of the observed ones (for radars the most frequent). Tables use every cell. `
  }Axes: km east and north of the origin of ${projectionWords(grid.crs)}.${outside.length > 0 && html` Beyond the edge: ${joined(outside, ", ")}.`}${
    input.assetsLeftOut !== undefined &&
    input.assetsLeftOut > 0 &&
    html` Of the assets the first ${countText(input.assets?.length ?? 0)} are drawn; ${countText(input.assetsLeftOut)} more are in assets.csv.`
  }</p>`;
}
