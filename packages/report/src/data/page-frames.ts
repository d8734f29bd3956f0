import { cssColour } from "../map/categories.ts";
import { type ColourClasses, depthClasses } from "../map/classes.ts";
import { thin } from "../map/thin.ts";
import { countText } from "../text/numbers.ts";
import type { PageClasses, PageLayer, Quantised } from "./contract.ts";
import type { FrameSeries } from "./frame-stack.ts";
import { type QuantumOf, quantise, stepThatReaches } from "./quantise.ts";

/** Depths are stored by tenths of a millimetre, as they are printed, unless they reach beyond all codes. */
export function depthQuantum(fields: readonly Float32Array[]): QuantumOf {
  let most = 0;
  for (const field of fields) for (const mm of field) if (mm > most) most = mm;
  return { step: stepThatReaches(0.1, 0, most), offset: 0 };
}

/** Classes as the page's script has them, for values that are told `times` as large. */
export function pageClasses(classes: ColourClasses, times = 1): PageClasses {
  return {
    edges: classes.edges.map((edge) => edge * times),
    colours: classes.colours.map((colour) => (colour[3] === 0 ? "" : cssColour(colour))),
    labels: classes.labels,
  };
}

/**
 * Frames by the layer that they add up to; all share one set of classes, so that their colours can be compared.
 *
 * @param mostBytes - that all of them may take
 */
export function framesOf(
  series: readonly FrameSeries[],
  mostBytes: number,
): ReadonlyMap<string, NonNullable<PageLayer["frames"]>> {
  const shown = series.filter(({ frames }) => frames.length > 0);
  const classes = pageClasses(
    depthClasses(shown.flatMap(({ frames }) => frames.map(({ depthMm }) => depthMm))),
  );
  const share = mostBytes / Math.max(1, shown.length);
  return new Map(
    shown.map((one) => {
      const fields = fitting(one, share);
      return [
        one.layerId,
        {
          intervals: one.frames.map(({ startEpochMs, endEpochMs }) => [startEpochMs, endEpochMs] as const),
          classes,
          fields,
          note: noteOf(one, fields),
        },
      ];
    }),
  );
}

/** The frames as fine as the bytes allow: blocks are doubled until they fit. */
function fitting({ nx, ny, block, frames }: FrameSeries, mostBytes: number): Quantised {
  const quantum = depthQuantum(frames.map(({ depthMm }) => depthMm));
  for (let more = 1; ; more *= 2) {
    const pictures = frames.map(({ depthMm }) =>
      thin(depthMm, nx, ny, "mean", Math.ceil(Math.max(nx, ny) / more)),
    );
    const stored = quantise(
      pictures.map(({ values }) => values),
      { nx: pictures[0].nx, ny: pictures[0].ny, block: block * pictures[0].block },
      quantum,
    );
    if (stored.data.length <= mostBytes || Math.max(stored.nx, stored.ny) <= 16) return stored;
  }
}

function noteOf({ joined, frames }: FrameSeries, { block }: Quantised): string {
  const notes: string[] = [];
  if (joined > 1) {
    notes.push(
      `Each of the ${countText(frames.length)} frames joins ${joined} intervals of the run: the sum of what was observed.`,
    );
  }
  if (block > 1) notes.push(`Drawn thinned: the mean of ${block} × ${block} cells.`);
  return notes.join(" ");
}
