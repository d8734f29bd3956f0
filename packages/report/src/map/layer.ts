import { hatchPattern, swatch } from "../charts/hatch.ts";
import type { MapLayer, ReportRadar } from "../input.ts";
import { html, type Markup } from "../text/html.ts";
import { CATEGORY_COLOURS, categoryColour, categoryPattern, cssColour } from "./categories.ts";
import {
  CLEAR,
  type ColourClasses,
  classIndex,
  decibelClasses,
  depthClasses,
  errorClasses,
  fractionClasses,
  heightClasses,
  shareClasses,
} from "./classes.ts";
import { palettePng, type Rgba } from "./png.ts";
import { type Picture, thin } from "./thin.ts";

/** A layer ready to be drawn: its picture, what lies over it, and its legend. */
export interface DrawnLayer {
  readonly layer: MapLayer;
  readonly picture: Picture;
  /** Palette picture of the cells, one pixel a cell; not-observed cells are clear. */
  readonly png: Uint8Array;
  /** Patterns laid over the cells that a test picks: one per category. */
  readonly overlays: readonly {
    readonly id: string;
    readonly category: number;
    passes(index: number): boolean;
  }[];
  readonly legend: readonly { readonly swatch: Markup; readonly label: string }[];
  readonly unit: string;
}

/** Each legend has a pattern of its own: one inside a hidden legend would draw nothing elsewhere. */
function notObserved(layer: number): { swatch: Markup; label: string } {
  const id = `legend-hatch-${layer}`;
  return {
    swatch: swatch(
      html`<defs>${hatchPattern(id)}</defs><rect class="swatch-frame hollow" x="0.5" y="0.5" width="21" height="13"/><rect x="0.5" y="0.5" width="21" height="13" fill="url(#${id})"/>`,
    ),
    label: "not observed",
  };
}

function colourSwatch(colour: Rgba): Markup {
  return swatch(
    html`<rect class="swatch-frame" x="0.5" y="0.5" width="21" height="13" fill="${colour[3] === 0 ? "none" : cssColour(colour)}"/>`,
  );
}

/** Palette index of each cell: 0 is clear, for what was not observed; 1 + class for the rest. */
function cellPng(picture: Picture, classOf: (value: number) => number, colours: readonly Rgba[]): Uint8Array {
  const indices = Uint8Array.from(picture.values, (value) => (Number.isNaN(value) ? 0 : 1 + classOf(value)));
  return palettePng(indices, picture.nx, picture.ny, [CLEAR, ...colours]);
}

function drawAmounts(layer: MapLayer, index: number, picture: Picture, classes: ColourClasses): DrawnLayer {
  return {
    layer,
    picture,
    png: cellPng(picture, (value) => classIndex(classes, value), classes.colours),
    overlays: [],
    legend: [
      ...classes.labels.map((label, i) => ({ swatch: colourSwatch(classes.colours[i]), label })),
      notObserved(index),
    ],
    unit: classes.unit,
  };
}

function drawRadars(
  layer: MapLayer,
  index: number,
  picture: Picture,
  radars: readonly ReportRadar[],
): DrawnLayer {
  const stray = picture.values.find((value) => !Number.isNaN(value) && radars[value] === undefined);
  if (stray !== undefined) throw new RangeError(`layer ${layer.id} names radar ${stray} of ${radars.length}`);
  const overlays = radars.map((_, radar) => ({
    id: `radar-tile-${radar}`,
    category: radar,
    passes: (index: number) => picture.values[index] === radar,
  }));
  return {
    layer,
    picture,
    png: cellPng(picture, (value) => value % CATEGORY_COLOURS.length, CATEGORY_COLOURS),
    overlays,
    legend: [
      ...radars.map((radar, i) => ({
        swatch: swatch(
          html`<defs>${categoryPattern(`legend-tile-${i}`, i)}</defs><rect class="swatch-frame" x="0.5" y="0.5" width="21" height="13" fill="${cssColour(
            categoryColour(i),
          )}"/><rect x="0.5" y="0.5" width="21" height="13" fill="url(#legend-tile-${i})"/>`,
        ),
        label: radar.name === undefined || radar.name === radar.id ? radar.id : `${radar.id} · ${radar.name}`,
      })),
      notObserved(index),
    ],
    unit: "",
  };
}

/** A layer thinned for the page, with its classes; names have none. */
export interface ClassedLayer {
  readonly layer: MapLayer;
  readonly picture: Picture;
  readonly classes: ColourClasses | undefined;
}

/** Thins and classes the layers; all totals share one set of classes, so that their colours can be compared. */
export function classLayers(layers: readonly MapLayer[], nx: number, ny: number): ClassedLayer[] {
  const thinned = layers.map((layer) => ({
    layer,
    picture: thin(layer.values, nx, ny, layer.quantity === "radarIndex" ? "most" : "mean"),
  }));
  const totals = depthClasses(
    thinned
      .filter(({ layer }) => layer.quantity === "depthMm" && layer.scale === undefined)
      .map(({ picture }) => picture.values),
  );
  return thinned.map(({ layer, picture }) => ({
    layer,
    picture,
    classes: classesOf(layer, picture.values, totals),
  }));
}

function classesOf(
  { quantity, scale }: MapLayer,
  values: Float32Array,
  totals: ColourClasses,
): ColourClasses | undefined {
  switch (quantity) {
    case "depthMm":
      if (scale === undefined) return totals;
      return scale === "error" ? errorClasses(values) : depthClasses([values]);
    case "fraction":
      return fractionClasses();
    case "share":
      return shareClasses();
    case "heightM":
      return heightClasses(values);
    case "decibel":
      return decibelClasses(values);
    case "radarIndex":
      return undefined;
  }
}

/** The layers that stand on the page without script, ready to be drawn. */
export function drawLayers(classed: readonly ClassedLayer[], radars: readonly ReportRadar[]): DrawnLayer[] {
  return classed
    .filter(({ layer }) => layer.group === undefined)
    .map(({ layer, picture, classes }, index) =>
      classes === undefined
        ? drawRadars(layer, index, picture, radars)
        : drawAmounts(layer, index, picture, classes),
    );
}
