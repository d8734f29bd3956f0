import { quantileSorted, ticks } from "d3-array";
import {
  interpolateCividis,
  interpolateMagma,
  interpolatePlasma,
  interpolatePuOr,
  interpolateViridis,
} from "d3-scale-chromatic";
import { mmText } from "../text/numbers.ts";
import type { Rgba } from "./png.ts";

/** Classes of a quantity, each with its colour and the words of the legend. */
export interface ColourClasses {
  /** Lower edges, ascending: a value belongs to the last edge that it reaches. */
  readonly edges: readonly number[];
  readonly colours: readonly Rgba[];
  readonly labels: readonly string[];
  readonly unit: string;
}

/** Nothing drawn: the paper shows through. */
export const CLEAR: Rgba = [255, 255, 255, 0];

/** From here on a depth is drawn as rain; below it, the paper shows. */
export const LEAST_DRAWN_MM = 0.1;

/** Class of a value: the index of the last edge that it reaches; 0 also for what lies below the first. */
export function classIndex(classes: ColourClasses, value: number): number {
  let index = 0;
  while (index + 1 < classes.edges.length && value >= classes.edges[index + 1]) index += 1;
  return index;
}

function parseColour(text: string): Rgba {
  const hex = /^#(..)(..)(..)$/.exec(text);
  if (hex)
    return [Number.parseInt(hex[1], 16), Number.parseInt(hex[2], 16), Number.parseInt(hex[3], 16), 255];
  const [r, g, b] = (/(\d+)\D+(\d+)\D+(\d+)/.exec(text) ?? []).slice(1).map(Number);
  return [r, g, b, 255];
}

/** Evenly spaced colours of a ramp, from one place on it to another. */
function sample(ramp: (t: number) => string, from: number, to: number, count: number): Rgba[] {
  return Array.from({ length: count }, (_, i) =>
    parseColour(ramp(from + ((to - from) * i) / Math.max(1, count - 1))),
  );
}

/** The light end mixed with the paper, so that little rain looks little; lightness keeps its order. */
function paled(colours: readonly Rgba[]): Rgba[] {
  return colours.map(([r, g, b], i) => {
    const paper = 0.6 * (1 - i / Math.max(1, colours.length - 1)) ** 2;
    const mix = (channel: number) => Math.round(channel + (255 - channel) * paper);
    return [mix(r), mix(g), mix(b), 255];
  });
}

function spanLabels(edges: readonly number[], text: (edge: number) => string): string[] {
  return edges.map((edge, i) =>
    i + 1 < edges.length ? `${text(edge)} – ${text(edges[i + 1])}` : `≥ ${text(edge)}`,
  );
}

/** The part of the observed values that decides the scale: nearly all, so that one pixel does not. */
function upperEnd(fields: readonly Float32Array[]): number {
  const observed = fields.flatMap((values) => Array.from(values).filter(Number.isFinite));
  observed.sort((a, b) => a - b);
  return quantileSorted(observed, 0.998) ?? 0;
}

/**
 * Classes for depths: dry paper, then cividis from light (little) to dark (much).
 *
 * One set for all depth layers, so that their colours can be compared.
 * Ramp: Nuñez, Anderton and Renslow (2018), PLOS ONE 13(7) e0199239, through d3-scale-chromatic.
 */
export function depthClasses(fields: readonly Float32Array[], ramp = interpolateCividis): ColourClasses {
  const round = ticks(0, Math.max(1, upperEnd(fields)), 7).filter((edge) => edge > LEAST_DRAWN_MM);
  // Most of a field is usually in the lowest class: it is cut once more where that leaves a round edge.
  const low = round[0] / 5 >= 4 * LEAST_DRAWN_MM ? [round[0] / 5] : [];
  const edges = [0, LEAST_DRAWN_MM, ...low, ...round];
  const labels = spanLabels(edges, (mm) => mmText(mm).replace(/\.0$/, ""));
  return {
    edges,
    colours: [CLEAR, ...paled(sample(ramp, 0.97, 0, edges.length - 1))],
    labels: [`none, or below ${LEAST_DRAWN_MM}`, ...labels.slice(1)],
    unit: "mm",
  };
}

/** Classes for errors of depths: as depths, but in the colours of plasma, so that no one takes one for the other. */
export function errorClasses(values: Float32Array): ColourClasses {
  return depthClasses([values], interpolatePlasma);
}

/** Classes for shares that are mostly small and better so: paper for none, then viridis from light to dark. */
export function shareClasses(): ColourClasses {
  const edges = [0, 0.005, 0.05, 0.1, 0.25, 0.5, 0.75];
  return {
    edges,
    colours: [CLEAR, ...sample(interpolateViridis, 0.95, 0.05, edges.length - 1)],
    labels: ["none, or below 0.5", "0.5 – 5", "5 – 10", "10 – 25", "25 – 50", "50 – 75", "75 – 100"],
    unit: "%",
  };
}

/**
 * Classes for decibels: viridis from light (none) to dark where nothing is below zero; else purple to orange through
 * the paper about zero, which stays apart under the common kinds of colour blindness (Brewer's PuOr).
 */
export function decibelClasses(values: Float32Array): ColourClasses {
  const least = values.reduce((low, db) => Math.min(low, Number.isNaN(db) ? low : db), 0);
  const most = Math.max(1, upperEnd([values]));
  const text = (db: number) => String(db).replace("-", "\u2212");
  if (least > -0.05) {
    const edges = [0, 0.1, ...ticks(0, most, 6).filter((db) => db > 0.1 && db < most)];
    return {
      edges,
      colours: [CLEAR, ...sample(interpolateViridis, 0.95, 0.05, edges.length - 1)],
      labels: ["none, or below 0.1", ...spanLabels(edges, text).slice(1)],
      unit: "dB",
    };
  }
  const far = Math.max(most, -least);
  const upwards = ticks(0, far, 4).filter((db) => db > 0 && db < far);
  const steps = upwards.length > 0 ? upwards : [far / 2];
  const edges = [-1000, ...steps.toReversed().map((db) => -db), ...steps];
  return {
    edges,
    colours: sample(interpolatePuOr, 0.92, 0.08, edges.length),
    labels: [`below ${text(-steps[steps.length - 1])}`, ...spanLabels(edges, text).slice(1)],
    unit: "dB",
  };
}

/** Classes for an observed share: magma from dark (little seen) to light (all seen). */
export function fractionClasses(): ColourClasses {
  const edges = [0, 0.25, 0.5, 0.75, 0.9, 0.99];
  return {
    edges,
    colours: sample(interpolateMagma, 0.12, 0.97, edges.length),
    labels: ["0 – 25", "25 – 50", "50 – 75", "75 – 90", "90 – 99", "99 – 100"],
    unit: "%",
  };
}

/** Classes for heights: viridis from light (low) to dark (high). */
export function heightClasses(values: Float32Array): ColourClasses {
  const top = Math.max(500, upperEnd([values]));
  const round = ticks(0, top, 6);
  // A top edge that nothing reaches would be an empty class.
  const edges = round.length > 1 && round[round.length - 1] >= top ? round.slice(0, -1) : round;
  return {
    edges,
    colours: sample(interpolateViridis, 0.98, 0.05, edges.length),
    labels: spanLabels(edges, (m) => String(m)),
    unit: "m",
  };
}
