import type { Grid, Ring } from "@rainreckon/core";
import { ticks } from "d3-array";
import { hatchPattern } from "../charts/hatch.ts";
import { type Box, overlap, placeLabels } from "../charts/labels.ts";
import { assetMark, gaugeMark, ROLE_WORDS, radarMark } from "../charts/marks.ts";
import type { ReportCatchment, ReportGauge, ReportInput } from "../input.ts";
import { html, type Markup } from "../text/html.ts";
import { mmText, svgNumber } from "../text/numbers.ts";
import { categoryPattern } from "./categories.ts";
import type { DrawnLayer } from "./layer.ts";
import { pngDataUri } from "./png.ts";
import { cellsPath } from "./regions.ts";

const MARGIN = { left: 54, right: 14, top: 14, bottom: 48 };
const MOST_WIDE = 760;
const MOST_HIGH = 680;
const LABEL_PX = 11;

/** Where the grid lies on the drawing, in its user units. */
export interface MapFrame {
  readonly left: number;
  readonly top: number;
  readonly width: number;
  readonly height: number;
  readonly unitsPerM: number;
  readonly grid: Grid;
}

export function mapFrame(grid: Grid): MapFrame {
  const unitsPerCell = Math.min(MOST_WIDE / grid.nx, MOST_HIGH / grid.ny);
  return {
    left: MARGIN.left,
    top: MARGIN.top,
    width: grid.nx * unitsPerCell,
    height: grid.ny * unitsPerCell,
    unitsPerM: unitsPerCell / grid.cellM,
    grid,
  };
}

/** Size of the whole drawing, axes and all. */
export function mapSize(frame: MapFrame): { width: number; height: number } {
  return {
    width: svgNumber(frame.left + frame.width + MARGIN.right),
    height: svgNumber(frame.top + frame.height + MARGIN.bottom),
  };
}

/** Place on the drawing of a place of the grid's coordinate system. */
export function toDrawing(frame: MapFrame, xM: number, yM: number): { x: number; y: number } {
  return {
    x: frame.left + (xM - frame.grid.westM) * frame.unitsPerM,
    y: frame.top + (frame.grid.northM - yM) * frame.unitsPerM,
  };
}

/** True where a place lies on the grid. */
export function isOnMap(frame: MapFrame, place: { readonly xM: number; readonly yM: number }): boolean {
  const { x, y } = toDrawing(frame, place.xM, place.yM);
  return x >= frame.left && x <= frame.left + frame.width && y >= frame.top && y <= frame.top + frame.height;
}

function ringPath(frame: MapFrame, ring: Ring): string {
  let path = "";
  let last = "";
  for (const [xM, yM] of ring) {
    const { x, y } = toDrawing(frame, xM, yM);
    // A tenth of a unit is finer than a screen shows; corners closer than that are one.
    const point = `${Math.round(x * 10) / 10} ${Math.round(y * 10) / 10}`;
    if (point !== last) path += `${path === "" ? "M" : "L"}${point}`;
    last = point;
  }
  return `${path}Z`;
}

/** What was not observed, hatched: drawn once, and used again by each further layer with the same holes. */
function unseenCells(layers: readonly DrawnLayer[]): Markup[] {
  const seen = new Map<string, string>();
  return layers.map(({ picture: { nx, ny, values } }) => {
    const path = cellsPath(nx, ny, (cell) => Number.isNaN(values[cell]));
    if (path === "") return html``;
    const known = seen.get(path);
    if (known !== undefined) return html`<use href="#${known}"/>`;
    const id = `unseen-${seen.size}`;
    seen.set(path, id);
    return html`<path id="${id}" d="${path}" fill="url(#map-hatch)"/>`;
  });
}

function layerGroup(frame: MapFrame, drawn: DrawnLayer, unseen: Markup, index: number): Markup {
  const { picture } = drawn;
  // The last row and column of blocks may reach beyond the grid; the clip cuts them there.
  const unitsPerCell = frame.grid.cellM * frame.unitsPerM * picture.block;
  const cells = (passes: (cell: number) => boolean) => cellsPath(picture.nx, picture.ny, passes);
  return html`<g class="layer layer-${index}"><g transform="translate(${frame.left} ${frame.top}) scale(${unitsPerCell})">${unseen}<image class="cells" width="${picture.nx}" height="${picture.ny}" preserveAspectRatio="none" href="${pngDataUri(
    drawn.png,
  )}"/>${drawn.overlays.map(
    ({ id, category, passes }) =>
      html`<defs>${categoryPattern(id, category, 1 / unitsPerCell)}</defs><path d="${cells(passes)}" fill="url(#${id})"/>`,
  )}</g></g>`;
}

function axes(frame: MapFrame): Markup {
  const { grid, left, top, width, height } = frame;
  const eastKm = (grid.westM + grid.nx * grid.cellM) / 1000;
  const southKm = (grid.northM - grid.ny * grid.cellM) / 1000;
  const across = ticks(grid.westM / 1000, eastKm, Math.max(2, width / 95));
  const upwards = ticks(southKm, grid.northM / 1000, Math.max(2, height / 80));
  const text = (km: number) => String(km).replace("-", "\u2212");
  return html`<g class="axis">${across.map((km) => {
    const { x } = toDrawing(frame, km * 1000, grid.northM);
    return html`<path d="M${svgNumber(x)} ${svgNumber(top + height)}v5"/><path class="grid-line" d="M${svgNumber(x)} ${top}v${svgNumber(height)}"/><text x="${svgNumber(x)}" y="${svgNumber(top + height + 18)}" text-anchor="middle">${text(km)}</text>`;
  })}${upwards.map((km) => {
    const { y } = toDrawing(frame, grid.westM, km * 1000);
    return html`<path d="M${left} ${svgNumber(y)}h-5"/><path class="grid-line" d="M${left} ${svgNumber(y)}h${svgNumber(width)}"/><text x="${left - 8}" y="${svgNumber(y + 4)}" text-anchor="end">${text(km)}</text>`;
  })}<rect class="frame" x="${left}" y="${top}" width="${svgNumber(width)}" height="${svgNumber(height)}"/><text class="axis-title" x="${svgNumber(left + width / 2)}" y="${svgNumber(top + height + 38)}" text-anchor="middle">km east</text><text class="axis-title" transform="translate(13 ${svgNumber(top + height / 2)}) rotate(-90)" text-anchor="middle">km north</text></g>`;
}

function scaleBar(frame: MapFrame): Markup {
  const wishKm = (frame.width / frame.unitsPerM / 1000) * 0.2;
  const power = 10 ** Math.floor(Math.log10(wishKm));
  const km = [5, 2, 1].map((step) => step * power).find((length) => length <= wishKm) ?? power;
  const length = km * 1000 * frame.unitsPerM;
  const x = frame.left + 14;
  const y = frame.top + frame.height - 14;
  return html`<g class="scale-bar"><rect class="backing" x="${x - 8}" y="${svgNumber(y - 24)}" width="${svgNumber(length + 16)}" height="34" rx="3"/><path d="M${x} ${svgNumber(y - 5)}v5h${svgNumber(length)}v-5"/><text x="${svgNumber(x + length / 2)}" y="${svgNumber(y - 7)}" text-anchor="middle">${km} km</text></g>`;
}

function northArrow(frame: MapFrame): Markup {
  const x = svgNumber(frame.left + frame.width - 24);
  return html`<g class="north" transform="translate(${x} ${frame.top + 42})"><title>Grid north</title><rect class="backing" x="-14" y="-36" width="28" height="54" rx="3"/><path d="M0 -32L7 -8L0 -13L-7 -8Z"/><text y="12" text-anchor="middle">N</text></g>`;
}

function catchmentOutlines(frame: MapFrame, catchments: readonly ReportCatchment[]): Markup {
  const paths = catchments.map((catchment) => ({
    name: catchment.name,
    path: catchment.polygons.flatMap((rings) => rings.map((ring) => ringPath(frame, ring))).join(""),
  }));
  return html`<g class="catchments">${paths.map(({ path }) => html`<path class="casing" d="${path}"/>`)}${paths.map(
    ({ path, name }, index) =>
      html`<path class="outline" data-place="c${index}" d="${path}"><title>${name}</title></path>`,
  )}</g>`;
}

const NAME_PX = 13;

/** Names in the middle of their catchments, moved up or down where marks stand. */
function catchmentNames(
  frame: MapFrame,
  catchments: readonly ReportCatchment[],
  marks: readonly { readonly x: number; readonly y: number }[],
): { readonly markup: Markup; readonly boxes: readonly Box[] } {
  const boxes: Box[] = [];
  const names = catchments.map(({ name, polygons }) => {
    const middle = ringMiddle(polygons[0]?.[0] ?? []);
    if (middle === undefined || !isOnMap(frame, middle)) return undefined;
    const { x, y } = toDrawing(frame, middle.xM, middle.yM);
    const width = name.length * NAME_PX * 0.6;
    const boxAt = (down: number) => ({
      x: x - width / 2,
      y: y + down - NAME_PX,
      width,
      height: NAME_PX * 1.3,
    });
    const met = (box: Box) =>
      marks.filter(
        (mark) =>
          mark.x > box.x - 6 &&
          mark.x < box.x + box.width + 6 &&
          mark.y > box.y - 6 &&
          mark.y < box.y + box.height + 6,
      ).length + boxes.filter((other) => overlap(box, other)).length;
    const down = [0, -16, 16, -30, 30].reduce((best, next) =>
      met(boxAt(next)) < met(boxAt(best)) ? next : best,
    );
    boxes.push(boxAt(down));
    return html`<text x="${svgNumber(x)}" y="${svgNumber(y + down)}" text-anchor="middle">${name}</text>`;
  });
  return { markup: html`<g class="catchment-names">${names}</g>`, boxes };
}

/** Centre of gravity of a ring (the usual sum over its corners); undefined where it encloses nothing. */
function ringMiddle(ring: Ring): { xM: number; yM: number } | undefined {
  let twiceArea = 0;
  let sumX = 0;
  let sumY = 0;
  for (let i = 0; i + 1 < ring.length; i += 1) {
    const [x0, y0] = ring[i];
    const [x1, y1] = ring[i + 1];
    const cross = x0 * y1 - x1 * y0;
    twiceArea += cross;
    sumX += (x0 + x1) * cross;
    sumY += (y0 + y1) * cross;
  }
  if (twiceArea === 0) return undefined;
  return { xM: sumX / (3 * twiceArea), yM: sumY / (3 * twiceArea) };
}

function gaugeWords(gauge: ReportGauge): string {
  const mm = (value: number) => (Number.isFinite(value) ? `${mmText(value)} mm` : "no depth");
  const name = gauge.name === undefined ? "" : ` ${gauge.name}`;
  return `Gauge ${gauge.id}${name} (${gauge.network}), ${ROLE_WORDS[gauge.role]}: gauge ${mm(gauge.gaugeMm)}, radar ${mm(gauge.radarMm)}`;
}

/** Gauges, radars and assets that lie on the map, with what is drawn of each. */
function marksOf(frame: MapFrame, { gauges, radars, assets = [] }: ReportInput) {
  const marks = [
    ...radars.map((radar, i) => ({
      kind: "radar-label",
      place: radar,
      draw: (x: number, y: number) =>
        radarMark(x, y, `Radar ${radar.id}${radar.name === undefined ? "" : ` ${radar.name}`}`, `r${i}`),
    })),
    ...assets.map((asset, i) => ({
      kind: "asset-label",
      place: asset,
      draw: (x: number, y: number) =>
        assetMark(x, y, `Asset ${asset.id}${asset.name === undefined ? "" : ` ${asset.name}`}`, `a${i}`),
    })),
    ...gauges.map((gauge, i) => ({
      kind: "gauge-label",
      place: gauge,
      draw: (x: number, y: number) => gaugeMark(gauge.role, x, y, gaugeWords(gauge), `g${i}`),
    })),
  ];
  return marks
    .filter(({ place }) => isOnMap(frame, place))
    .map((mark) => ({ ...mark, ...toDrawing(frame, mark.place.xM, mark.place.yM), text: mark.place.id }));
}

function places(frame: MapFrame, marks: ReturnType<typeof marksOf>, taken: readonly Box[]): Markup {
  const sheet = { x: frame.left, y: frame.top, width: frame.width, height: frame.height };
  const labels = placeLabels(marks, sheet, LABEL_PX, taken);
  return html`<g class="places">${marks.map(({ draw, x, y }) => draw(x, y))}${labels.map(
    ({ mark, text, x, y, anchor }) =>
      html`<text class="${marks[mark].kind}" x="${svgNumber(x)}" y="${svgNumber(y)}" text-anchor="${anchor}">${text}</text>`,
  )}</g>`;
}

/**
 * The map: layers as pictures, and over them catchments, gauges, radars, scale and north.
 *
 * Layers carry the classes `layer layer-N`; the page decides which of them shows.
 */
export function svgMap(input: ReportInput, layers: readonly DrawnLayer[]): Markup {
  const frame = mapFrame(input.grid);
  const { width, height } = mapSize(frame);
  const unseen = unseenCells(layers);
  const marks = marksOf(frame, input);
  const names = catchmentNames(frame, input.catchments, marks);
  const first = layers[0]?.picture;
  const unitsPerCell = input.grid.cellM * frame.unitsPerM * (first?.block ?? 1);
  return html`<svg class="map" role="img" aria-labelledby="map-title map-desc" viewBox="0 0 ${width} ${height}"><title id="map-title">Map of the chosen layer</title><desc id="map-desc">Grid of ${input.grid.nx} by ${input.grid.ny} cells with catchment outlines, rain gauges and radars. The depths are in the tables of catchments and gauges below.</desc><defs><clipPath id="map-clip"><rect x="${frame.left}" y="${frame.top}" width="${svgNumber(frame.width)}" height="${svgNumber(frame.height)}"/></clipPath>${hatchPattern("map-hatch", "rising", 1 / unitsPerCell)}</defs><rect class="paper" x="${frame.left}" y="${frame.top}" width="${svgNumber(frame.width)}" height="${svgNumber(frame.height)}"/><g clip-path="url(#map-clip)">${layers.map(
    (layer, index) => layerGroup(frame, layer, unseen[index], index),
  )}${catchmentOutlines(frame, input.catchments)}</g>${axes(frame)}${names.markup}${places(frame, marks, names.boxes)}${scaleBar(frame)}${northArrow(frame)}</svg>`;
}
