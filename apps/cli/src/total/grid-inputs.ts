import { InputError, type Interval, midEpochMs } from "@rainreckon/core";
import {
  formatsReady,
  type GriddedFile,
  type GriddedHeader,
  type GriddedOptions,
  type GriddedQuantity,
  openGridded,
} from "@rainreckon/formats";
import type { ManifestInput } from "../manifest.ts";
import type { LoadedGrids, LoadedPlan } from "../plan/load.ts";
import type { PlanGrids } from "../plan/schema.ts";
import type { LeftOutLog } from "../ui/left-out.ts";
import { counted } from "../ui/numbers.ts";
import type { Progress } from "../ui/progress.ts";
import { conversionOf } from "./conversion.ts";
import { type HashedFile, hashFile } from "./inputs.ts";
import type { JobGrids, JobLayer } from "./job.ts";
import { sourceCells } from "./source-cells.ts";

/** One entry of a plan's `grids` with its layers, and how many of them can reach into the window. */
export interface GridInput {
  readonly source: JobGrids;
  readonly layersInReach: number;
}

/** What a plan calls a quantity, as the readers name it. */
export const QUANTITY_OF: Readonly<Record<PlanGrids["quantity"], GriddedQuantity>> = {
  rate: "rainRateMmPerHour",
  depth: "depthMm",
  reflectivity: "reflectivityDbz",
};

interface FoundLayer extends Interval {
  readonly file: HashedFile;
  readonly index: number;
  readonly options: GriddedOptions;
  readonly dataset: string;
}

interface FileUse {
  readonly file: HashedFile;
  used: number;
  readonly reasons: Set<string>;
}

/**
 * Opens every gridded file of a plan for its headers and puts the layers of each source in time order.
 *
 * A file that cannot be read is left out and named. Of layers for one time one counts; of depths whose spans overlap,
 * so that nothing is summed twice, those that join without overlap from the window's start on.
 *
 * @param seen - is told what became of each file
 */
export async function indexGrids(
  loaded: LoadedPlan,
  log: LeftOutLog,
  seen: (input: ManifestInput) => void,
  progressOf: (count: number) => Progress,
): Promise<GridInput[]> {
  const entries = loaded.gridFiles.filter(({ spec }) => spec.use);
  if (entries.length === 0) return [];
  await formatsReady();
  const uses = new Map<string, FileUse>();
  const found: GridInput[] = [];
  const progress = progressOf(entries.reduce((count, { files }) => count + files.length, 0));
  for (const entry of entries) {
    const input = sourceOf(entry.spec, await layersOf(entry, loaded, log, uses, progress), loaded, log, uses);
    if (input !== undefined) found.push(input);
  }
  progress.end();
  for (const { file, used, reasons } of uses.values()) {
    const reason = reasons.size > 0 ? { reason: [...reasons].join("; ") } : {};
    const use = used > 0 ? "used" : "left out";
    seen({ path: file.name, kind: "grid", sha256: file.sha256, bytes: file.bytes, use, ...reason });
  }
  return found;
}

async function layersOf(
  { spec, files }: LoadedGrids,
  loaded: LoadedPlan,
  log: LeftOutLog,
  uses: Map<string, FileUse>,
  progress: Progress,
): Promise<FoundLayer[]> {
  const layers: FoundLayer[] = [];
  const contents = new Map<string, string>();
  for (const path of files) {
    progress.advance();
    let use: FileUse | undefined;
    try {
      const file = await hashFile(loaded.folder, path);
      use = uses.get(file.name) ?? { file, used: 0, reasons: new Set<string>() };
      uses.set(file.name, use);
      const twin = contents.get(file.sha256);
      if (twin !== undefined && spec.time === undefined) {
        const what = `same bytes as ${twin}`;
        log.add("grid left out", { what, where: file.name, fix: "nothing to do: it counts once" });
        use.reasons.add(what);
        continue;
      }
      contents.set(file.sha256, file.name);
      layers.push(...(await layersOfFile(spec, use, log)));
    } catch (error) {
      if (!(error instanceof InputError)) throw error;
      log.add("grid left out", {
        what: error.what,
        where: use === undefined ? error.where : error.where.replace(path, () => (use as FileUse).file.name),
        fix: error.fix,
      });
      use?.reasons.add(error.what);
    }
  }
  return layers;
}

async function layersOfFile(spec: PlanGrids, use: FileUse, log: LeftOutLog): Promise<FoundLayer[]> {
  const { file } = use;
  const named = (where: string) => where.replace(file.path, () => file.name);
  const { grid, options } = await openAsPlanned(spec, file.path);
  try {
    for (const remark of grid.remarks) log.add("assumed", { ...remark, where: named(remark.where) });
    for (const fault of grid.leftOut) {
      log.add("layer left out", { what: fault.what, where: named(fault.where), fix: fault.fix });
      use.reasons.add(fault.what);
    }
    if (options.quantity !== undefined) {
      log.add("assumed", {
        what: `nothing in the file says what it holds: taken for ${spec.quantity}, as the plan says`,
        where: `grids ${spec.id}`,
        fix: "nothing to do, if that is right",
      });
    }
    const layers = grid.headers.flatMap((header, index): FoundLayer[] => {
      if (header.quantity !== QUANTITY_OF[spec.quantity]) {
        use.reasons.add(`${header.origin.dataset} is no ${spec.quantity}`);
        return [];
      }
      try {
        if (header.quantity === "depthMm" && !(header.endEpochMs > header.startEpochMs))
          throw new InputError("a depth with an instant, but no start and end", file.path, "");
        sourceCells(header);
      } catch (error) {
        if (!(error instanceof InputError)) throw error;
        const where = `${file.name}, ${header.origin.dataset}`;
        const fix = `write its crs or its time into the entry ${spec.id} of grids`;
        log.add("layer left out", { what: error.what, where, fix });
        use.reasons.add(error.what);
        return [];
      }
      for (const remark of header.remarks) {
        const what = remark.replace(/\.$/, "");
        log.add("assumed", { what, where: `grids ${spec.id}`, fix: "nothing to do, if that is right" });
      }
      return [{ ...spanOf(header), file, index, options, dataset: header.origin.dataset }];
    });
    if (layers.length === 0) {
      throw new InputError(
        `it holds no ${spec.quantity}`,
        file.path,
        `take it out of the entry ${spec.id} of grids, or change its quantity`,
      );
    }
    return layers;
  } finally {
    grid.close();
  }
}

/** Opened with what the plan says; what its layers are is the plan's to say only where the file does not. */
async function openAsPlanned(
  { crs, time, quantity }: PlanGrids,
  path: string,
): Promise<{ readonly grid: GriddedFile; readonly options: GriddedOptions }> {
  const told: GriddedOptions = {
    ...(crs === undefined ? {} : { crs }),
    ...(time === undefined
      ? {}
      : { time: { startEpochMs: Date.parse(time.from), endEpochMs: Date.parse(time.to) } }),
  };
  for (const options of [told, { ...told, quantity: QUANTITY_OF[quantity] }]) {
    const grid = await openGridded(path, options);
    if (grid !== undefined) return { grid, options };
  }
  throw new InputError(
    "no gridded rain that can be read",
    path,
    "known are ODIM_H5 COMP and IMAGE, CF NetCDF, GeoTIFF; take it out of grids",
  );
}

/** A rate or a reflectivity speaks for one instant, the middle of its span. */
function spanOf(header: GriddedHeader): Interval {
  if (header.quantity === "depthMm")
    return { startEpochMs: header.startEpochMs, endEpochMs: header.endEpochMs };
  const mid = midEpochMs(header);
  return { startEpochMs: mid, endEpochMs: mid };
}

function sourceOf(
  spec: PlanGrids,
  layers: readonly FoundLayer[],
  loaded: LoadedPlan,
  log: LeftOutLog,
  uses: ReadonlyMap<string, FileUse>,
): GridInput | undefined {
  const { plan } = loaded;
  const window: Interval = {
    startEpochMs: Date.parse(plan.window.from),
    endEpochMs: Date.parse(plan.window.to),
  };
  const isDepth = spec.quantity === "depth";
  const leaveOut = (layer: FoundLayer, what: string, fix: string) => {
    log.add("layer left out", { what, where: `${layer.file.name}, ${layer.dataset}`, fix });
    uses.get(layer.file.name)?.reasons.add(what);
  };
  const apart = oneForEachTime(layers, plan.rain.resent, leaveOut);
  const kept = isDepth ? withoutOverlap(apart, window, leaveOut) : apart;
  if (kept.length === 0) {
    log.add("grids without layers", {
      what: `no layer of "${spec.id}" can be used`,
      where: "plan, grids",
      fix: "see the lines above, or set use: false",
    });
    return undefined;
  }
  const medianRoundMs = isDepth
    ? Math.max(...kept.map(({ startEpochMs, endEpochMs }) => endEpochMs - startEpochMs))
    : (spec.medianStepMinutes as number) * 60_000;
  const maxGapMs = isDepth ? medianRoundMs : Math.round((spec.maxGapMinutes as number) * 60_000);
  const reachMs = isDepth ? 0 : Math.max(maxGapMs, medianRoundMs / 2);
  let layersInReach = 0;
  for (const { file, startEpochMs, endEpochMs } of kept) {
    const use = uses.get(file.name) as FileUse;
    if (endEpochMs >= window.startEpochMs - reachMs && startEpochMs <= window.endEpochMs + reachMs) {
      layersInReach++;
      use.used++;
    } else use.reasons.add("outside the window");
  }
  const outside = kept.length - layersInReach;
  if (outside > 0) {
    log.add(
      "layer outside the window",
      {
        what: `${counted(outside, "layer")} outside the window`,
        where: `grids ${spec.id}`,
        fix: "nothing to do, or widen the window in the plan",
      },
      outside,
    );
  }
  const rounds = kept.map(
    ({ file, index, options, startEpochMs, endEpochMs }, k): JobLayer => ({
      path: file.path,
      name: file.name,
      index,
      options,
      firstMidEpochMs: startEpochMs,
      lastMidEpochMs: endEpochMs,
      isFirst: !isDepth && k === 0,
      isLast: !isDepth && k === kept.length - 1,
    }),
  );
  const planned = {
    ...spec,
    moment: "DBZH",
    periods: [],
    minRateMmPerHour: plan.rain.minRateMmPerHour,
  };
  const conversion =
    spec.quantity === "reflectivity" ? conversionOf(planned, `grids ${spec.id}`, log) : undefined;
  return {
    source: {
      id: spec.id,
      quantity: QUANTITY_OF[spec.quantity],
      conversion,
      time: { medianRoundMs, maxGapMs },
      rounds,
    },
    layersInReach,
  };
}

type LeaveOut = (layer: FoundLayer, what: string, fix: string) => void;

/** In time order; of several layers for one time, the one that the plan's rule picks. */
function oneForEachTime(
  layers: readonly FoundLayer[],
  rule: "first" | "last",
  leaveOut: LeaveOut,
): FoundLayer[] {
  const byTime = new Map<string, FoundLayer>();
  for (const layer of layers) {
    const key = `${layer.startEpochMs},${layer.endEpochMs}`;
    const known = byTime.get(key);
    // Within one file the first layer counts: others there are other levels or other moments, not sent again.
    const isSentAgain = known !== undefined && known.file.name !== layer.file.name;
    const takesPlace = known === undefined || (isSentAgain && rule === "last");
    const [stays, goes] = takesPlace ? [layer, known] : [known, layer];
    byTime.set(key, stays);
    if (goes !== undefined) {
      const what = `a second layer for the time of ${stays.file.name}, ${stays.dataset}`;
      leaveOut(
        goes,
        what,
        isSentAgain ? "see rain.resent in the plan" : "nothing to do, if that is the right one",
      );
    }
  }
  return [...byTime.values()].sort((a, b) => a.startEpochMs - b.startEpochMs || a.endEpochMs - b.endEpochMs);
}

/**
 * Depths that share no time, from the window's start on: hourly sums that are made every five minutes would else count
 * twelve times. Of those that begin together the shorter one stays.
 *
 * @param layers - in time order
 */
function withoutOverlap(layers: readonly FoundLayer[], window: Interval, leaveOut: LeaveOut): FoundLayer[] {
  const inside = layers.filter(({ startEpochMs }) => startEpochMs >= window.startEpochMs);
  const before = layers.filter(({ startEpochMs }) => startEpochMs < window.startEpochMs);
  const kept: FoundLayer[] = [];
  for (const layer of inside) {
    const last = kept.at(-1);
    if (last === undefined || layer.startEpochMs >= last.endEpochMs) kept.push(layer);
    else
      leaveOut(
        layer,
        `its time overlaps that of ${last.file.name}`,
        "nothing to do: no rain is summed twice",
      );
  }
  for (const layer of before.toReversed()) {
    const next = kept[0];
    if (next === undefined || layer.endEpochMs <= next.startEpochMs) kept.unshift(layer);
    else
      leaveOut(
        layer,
        `its time overlaps that of ${next.file.name}`,
        "nothing to do: no rain is summed twice",
      );
  }
  return kept;
}
