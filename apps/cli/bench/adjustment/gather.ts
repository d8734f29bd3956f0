import { readFileSync } from "node:fs";
import path from "node:path";
import { rangeAt } from "../../src/total/adjust.ts";
import { type Comparison, compareWithGauges } from "../../src/total/against-gauges.ts";
import type { AssembledRun } from "../../src/total/assemble.ts";
import type { PreparedRun } from "../../src/total/prepare.ts";
import { floats, type TrueWorld } from "../ablation/worlds.ts";
import { runWorld } from "../shared/run-world.ts";

/** A world after its `total` job: what candidates are learned from, and what they are held against. */
export interface GatheredWorld {
  readonly run: PreparedRun;
  readonly total: AssembledRun;
  readonly comparison: Comparison;
  /** Radar depth of the intervals of the plan, an hour each. Shape [hours][cells]. */
  readonly hoursMm: readonly Float32Array[];
  readonly truthTotalMm: Float32Array;
  /** Shape [hours][cells]. */
  readonly truthHoursMm: readonly Float32Array[];
  /** From the radar that speaks loudest. Shape [cells]. */
  readonly rangeKm: Float32Array;
  /** 1 for cells that the radars observed for long enough to be printed. Shape [cells]. */
  readonly use: Uint8Array;
}

/**
 * Runs the `total` job on a world, radars and gauges, by a fresh plan, on the grid of the truth and without leaving
 * anything on disk.
 *
 * @param method - how the plan adjusts
 */
export async function gatherWorld(world: TrueWorld, method: string): Promise<GatheredWorld> {
  const { folder, grid, window } = world;
  const { run, total, units } = await runWorld(folder, { grid, window, adjustment: { method } });
  const cells = grid.nx * grid.ny;
  const { files } = JSON.parse(readFileSync(path.join(folder, "truth/truth.json"), "utf8")) as {
    readonly files: { readonly hours: readonly string[] };
  };
  const leastObserved = run.loaded.plan.rain.minObserved;
  return {
    run,
    total,
    comparison: compareWithGauges(run, total),
    hoursMm: units.flatMap(({ intervals }) => intervals.map(({ depthMm }) => depthMm)),
    truthTotalMm: world.totalMm,
    truthHoursMm: files.hours.map((name) => floats(path.join(folder, "truth", name), cells)),
    rangeKm: Float32Array.from({ length: cells }, (_, cell) => rangeAt(run, total, cell)),
    use: Uint8Array.from(total.planes.observedFraction, (share) => (share >= leastObserved ? 1 : 0)),
  };
}
