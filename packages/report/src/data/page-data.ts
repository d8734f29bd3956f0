import type { MapLayer, ReportInput } from "../input.ts";
import { CATEGORY_COLOURS, cssColour } from "../map/categories.ts";
import type { ClassedLayer } from "../map/layer.ts";
import { mapFrame, mapSize } from "../map/map.ts";
import { MAX_PICTURE_SIDE, thin } from "../map/thin.ts";
import { plainText } from "../text/html.ts";
import { zoned } from "../text/times.ts";
import type { PageClasses, PageData, PageLayer, PageUnit, Quantised } from "./contract.ts";
import { depthQuantum, framesOf, pageClasses } from "./page-frames.ts";
import { placesOf } from "./page-places.ts";
import { type QuantumOf, quantise } from "./quantise.ts";

/** Of the room that places leave, what the fields of the layers may take; the rest is for their intervals. */
const LAYER_SHARE = 0.45;

/**
 * All that the page's script is told.
 *
 * @param room - bytes that the data may take: fields are thinned until they fit
 */
export function pageData(input: ReportInput, classed: readonly ClassedLayer[], room: number): PageData {
  const places = placesOf(input);
  const left = Math.max(0, room - Buffer.byteLength(jsonForScript(places)));
  const frame = mapFrame(input.grid);
  const { width, height } = mapSize(frame);
  const { westM, northM, cellM, nx, ny } = input.grid;
  const localIsUtc = /^(utc|etc\/utc)$/i.test(input.zone);
  return {
    map: {
      viewWidth: width,
      viewHeight: height,
      left: frame.left,
      top: frame.top,
      width: frame.width,
      height: frame.height,
      westM,
      northM,
      cellM,
      nx,
      ny,
      ...(input.lattice === undefined ? {} : { lattice: input.lattice }),
    },
    clock: clockOf(input),
    zone: localIsUtc ? "" : plainText(input.zone),
    window: [input.window.startEpochMs, input.window.endEpochMs],
    layers: layersOf(input, classed, left),
    shown: Math.max(
      0,
      input.layers.findIndex(({ id }) => id === input.shownLayerId),
    ),
    places,
  };
}

/**
 * The data as JSON that can stand inside a script element: no `<` is left, so nothing in it can end the element or
 * open a comment.
 */
export function jsonForScript(data: unknown): string {
  return JSON.stringify(data)
    .replace(/</g, "\\u003c")
    .replace(/\u2028/g, "\\u2028")
    .replace(/\u2029/g, "\\u2029");
}

/** When the local clock changes its offset within the window, told by quarters of an hour. */
function clockOf({ window, zone }: ReportInput): PageData["clock"] {
  const changes: [number, number][] = [];
  const quarter = 900_000;
  for (let t = window.startEpochMs; t <= window.endEpochMs; t += quarter) {
    const { offset } = zoned(t, zone);
    if (changes.length === 0 || changes[changes.length - 1][1] !== offset) changes.push([t, offset]);
  }
  return changes;
}

function layersOf(input: ReportInput, classed: readonly ClassedLayer[], room: number): PageLayer[] {
  const frames = framesOf(input.frames ?? [], (1 - LAYER_SHARE) * room);
  const radarNames = input.radars.map(({ id, name }) =>
    plainText(name === undefined || name === id ? id : `${id} · ${name}`),
  );
  const fields = fitting(input, classed, LAYER_SHARE * room);
  return classed.map(({ layer, classes }, index): PageLayer => {
    const { unit, times } = STORED[layer.quantity];
    const own = frames.get(layer.id);
    return {
      id: plainText(layer.id),
      label: plainText(layer.label),
      what: plainText(layer.what),
      group: plainText(layer.group ?? ""),
      unit,
      classes: classes === undefined ? categoryClasses(input.radars.length) : pageClasses(classes, times),
      ...(classes === undefined ? { names: radarNames } : {}),
      field: fields[index],
      ...(own === undefined ? {} : { frames: own }),
    };
  });
}

/** The layers as fine as the bytes allow; those with a button of their own are thinned last. */
function fitting({ grid }: ReportInput, classed: readonly ClassedLayer[], mostBytes: number): Quantised[] {
  const stored = ({ layer, picture }: ClassedLayer, side: number) => {
    const how = layer.quantity === "radarIndex" ? "most" : "mean";
    const from = side === MAX_PICTURE_SIDE ? picture : thin(layer.values, grid.nx, grid.ny, how, side);
    const { quantumOf, times } = STORED[layer.quantity];
    const values = times === 1 ? from.values : from.values.map((value) => value * times);
    return quantise([values], from, quantumOf(values));
  };
  for (let less = 1; ; less *= 2) {
    const fields = classed.map((one) =>
      stored(
        one,
        Math.ceil(MAX_PICTURE_SIDE / (one.layer.group === undefined ? Math.max(1, less / 2) : less)),
      ),
    );
    const bytes = fields.reduce((sum, { data }) => sum + data.length, 0);
    if (bytes <= mostBytes || less >= MAX_PICTURE_SIDE / 16) return fields;
  }
}

/** How each quantity is stored and told: its step, its unit, and what values are multiplied by for that. */
const STORED: Readonly<
  Record<
    MapLayer["quantity"],
    {
      readonly quantumOf: (values: Float32Array) => QuantumOf;
      readonly unit: PageUnit;
      readonly times: number;
    }
  >
> = {
  depthMm: { quantumOf: (values) => depthQuantum([values]), unit: "mm", times: 1 },
  fraction: { quantumOf: () => ({ step: 0.1, offset: 0 }), unit: "%", times: 100 },
  share: { quantumOf: () => ({ step: 0.1, offset: 0 }), unit: "%", times: 100 },
  heightM: { quantumOf: () => ({ step: 10, offset: -1000 }), unit: "m", times: 1 },
  decibel: { quantumOf: () => ({ step: 0.1, offset: -1000 }), unit: "dB", times: 1 },
  radarIndex: { quantumOf: () => ({ step: 1, offset: 0 }), unit: "", times: 1 },
};

function categoryClasses(count: number): PageClasses {
  return {
    edges: Array.from({ length: count }, (_, index) => index),
    colours: Array.from({ length: count }, (_, index) =>
      cssColour(CATEGORY_COLOURS[index % CATEGORY_COLOURS.length]),
    ),
    labels: [],
  };
}
