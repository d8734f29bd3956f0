import { rmSync, writeFileSync } from "node:fs";
import path from "node:path";
import { type CalibrationProposal, proposeCalibration } from "@rainreckon/core";
import { parse } from "yaml";
import { composePlan } from "../../src/plan/compose.ts";
import { loadPlan } from "../../src/plan/load.ts";
import { survey } from "../../src/survey/survey.ts";
import { walkFiles } from "../../src/survey/walk.ts";
import { assemble } from "../../src/total/assemble.ts";
import type { UnitJob, UnitResult, UnitTrace } from "../../src/total/job.ts";
import { learnBeforehand } from "../../src/total/learned-run.ts";
import { prepareRun } from "../../src/total/prepare.ts";
import { runUnit } from "../../src/total/run-unit.ts";
import { leftOutLog } from "../../src/ui/left-out.ts";
import type { Terminal } from "../../src/ui/terminal.ts";
import { merged, type Overlay, type Variant } from "./variants.ts";
import type { TrueWorld } from "./worlds.ts";

/** What a variant of the plan makes of a world. Shapes [cells]. */
export interface VariantMaps {
  readonly totalMm: Float32Array;
  /** Share of the window that was observed. */
  readonly observed: Float32Array;
  /** Shape [hours][cells]. */
  readonly hoursMm: readonly Float32Array[];
  /** What the scans say of each radar's calibration; empty where no echo is worked on. */
  readonly offers: readonly CalibrationProposal[];
  readonly seconds: number;
}

export const SILENT: Terminal = {
  json: false,
  quiet: true,
  debug: false,
  live: false,
  result: () => undefined,
  note: () => undefined,
  strong: (text) => text,
};

/**
 * The plan that `plan` writes for a world's scans, on the truth's grid and window, as a plain object: no gauges and
 * no catchments, since maps are held against the truth alone.
 */
export async function worldPlan({ folder, grid, window }: TrueWorld): Promise<Overlay> {
  const radar = path.join(folder, "radar");
  const result = await survey([radar], walkFiles([radar]), SILENT);
  const plan = parse(composePlan(result, folder, "ablation")) as Overlay;
  return merged(plan, { grid, window, rain: { headlineRelations: [] } });
}

/** Runs the main job on a world under one variant of its plan, without leaving anything on disk. */
export async function runVariant(
  world: TrueWorld,
  plan: Overlay,
  variant: Variant,
  trace?: UnitTrace,
): Promise<VariantMaps> {
  const started = performance.now();
  const planFile = path.join(world.folder, `plan-${process.pid}.yaml`);
  // JSON is YAML.
  writeFileSync(planFile, JSON.stringify(merged(plan, variant.overlay)));
  try {
    const loaded = await loadPlan(planFile);
    const log = leftOutLog(SILENT);
    const still = { advance: () => undefined, end: () => undefined };
    const run = await learnBeforehand(await prepareRun(loaded, log, () => still), log);
    const results = new Map<number, UnitResult>();
    for (const job of run.jobs) results.set(job.number, await runUnit(run.shape, job, trace));
    const store = {
      has: (job: UnitJob) => results.has(job.number),
      save: () => undefined,
      load: (job: UnitJob) => results.get(job.number)!,
    };
    const windowMs = run.window.endEpochMs - run.window.startEpochMs;
    const worked = run.shape.radars.filter(({ echo }) => echo !== undefined);
    const evidence = worked.map(({ site, echo }) => ({
      siteId: site.id,
      consistency: echo?.learned.consistency,
    }));
    const { planes } = assemble(run.shape, run.jobs, store, windowMs);
    return {
      totalMm: planes.totalMm,
      observed: planes.observedFraction,
      hoursMm: [...results.values()].flatMap(({ intervals }) => intervals.map(({ depthMm }) => depthMm)),
      offers: proposeCalibration(evidence, run.overlaps),
      seconds: (performance.now() - started) / 1000,
    };
  } finally {
    rmSync(planFile, { force: true });
  }
}

/** The plan of a world with the calibration that was offered for each radar, as a user who believes it would write it. */
export function withOffers(plan: Overlay, offers: readonly CalibrationProposal[]): Overlay {
  const radars = (plan.radars as readonly { readonly id: string }[]).map((radar) => {
    const offsetDb = offers.find(({ siteId }) => siteId === radar.id)?.offsetDb;
    return offsetDb === undefined ? radar : { ...radar, offsetDb };
  });
  return { ...plan, radars };
}
