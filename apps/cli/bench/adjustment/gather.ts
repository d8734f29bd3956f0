import { readFileSync, rmSync, writeFileSync } from "node:fs";
import path from "node:path";
import { parse } from "yaml";
import { composePlan } from "../../src/plan/compose.ts";
import { loadPlan } from "../../src/plan/load.ts";
import { survey } from "../../src/survey/survey.ts";
import { walkFiles } from "../../src/survey/walk.ts";
import { rangeAt } from "../../src/total/adjust.ts";
import { type Comparison, compareWithGauges } from "../../src/total/against-gauges.ts";
import { type AssembledRun, assemble } from "../../src/total/assemble.ts";
import type { UnitJob, UnitResult } from "../../src/total/job.ts";
import { learnBeforehand } from "../../src/total/learned-run.ts";
import { type PreparedRun, prepareRun } from "../../src/total/prepare.ts";
import { runUnit } from "../../src/total/run-unit.ts";
import { leftOutLog } from "../../src/ui/left-out.ts";
import { SILENT } from "../ablation/run-variant.ts";
import { merged, type Overlay } from "../ablation/variants.ts";
import { floats, type TrueWorld } from "../ablation/worlds.ts";

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

/** The clock of the network whose stamps name no zone: what its README says, as a user would write it. */
const SALTWATER = { network: "saltwater", zone: "UTC+01:00" };

/**
 * Runs the `total` job on a world, radars and gauges, by a fresh plan, on the grid of the truth and without leaving
 * anything on disk.
 *
 * @param method - how the plan adjusts
 */
export async function gatherWorld(world: TrueWorld, method: string): Promise<GatheredWorld> {
  const { folder, grid, window } = world;
  const planFile = path.join(folder, `plan-${process.pid}.yaml`);
  const inputs = ["radar", "gauges", "catchments.geojson", "terrain.tif"].map((name) =>
    path.join(folder, name),
  );
  const result = await survey(inputs, walkFiles(inputs), SILENT);
  const plan = parse(composePlan(result, folder, "bench")) as Overlay;
  const gauges = (plan.gauges as readonly Overlay[]).map((entry) =>
    entry.network === SALTWATER.network ? { ...entry, ...SALTWATER } : entry,
  );
  const asked = {
    grid,
    window,
    adjustment: { method },
    rain: { headlineRelations: [] },
  };
  writeFileSync(planFile, JSON.stringify({ ...merged(plan, asked), gauges }));
  try {
    const log = leftOutLog(SILENT);
    const still = { advance: () => undefined, end: () => undefined };
    const run = await learnBeforehand(await prepareRun(await loadPlan(planFile), log, () => still), log);
    const results = new Map<number, UnitResult>();
    for (const job of run.jobs) results.set(job.number, await runUnit(run.shape, job));
    const store = {
      has: (job: UnitJob) => results.has(job.number),
      save: () => undefined,
      load: (job: UnitJob) => results.get(job.number)!,
    };
    const total = assemble(run.shape, run.jobs, store, run.window.endEpochMs - run.window.startEpochMs);
    const cells = grid.nx * grid.ny;
    const { files } = JSON.parse(readFileSync(path.join(folder, "truth/truth.json"), "utf8")) as {
      readonly files: { readonly hours: readonly string[] };
    };
    const leastObserved = run.loaded.plan.rain.minObserved;
    return {
      run,
      total,
      comparison: compareWithGauges(run, total),
      hoursMm: [...results.values()].flatMap(({ intervals }) => intervals.map(({ depthMm }) => depthMm)),
      truthTotalMm: world.totalMm,
      truthHoursMm: files.hours.map((name) => floats(path.join(folder, "truth", name), cells)),
      rangeKm: Float32Array.from({ length: cells }, (_, cell) => rangeAt(run, total, cell)),
      use: Uint8Array.from(total.planes.observedFraction, (share) => (share >= leastObserved ? 1 : 0)),
    };
  } finally {
    rmSync(planFile, { force: true });
  }
}
