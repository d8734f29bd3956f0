import { existsSync, mkdirSync, readFileSync, renameSync, rmSync, writeFileSync } from "node:fs";
import path from "node:path";
import { deserialize, serialize } from "node:v8";
import type { GaugeEvidence, JudgeContext } from "@rainreckon/verification";
import { parse } from "yaml";
import { composePlan } from "../../src/plan/compose.ts";
import { loadPlan } from "../../src/plan/load.ts";
import { survey } from "../../src/survey/survey.ts";
import { walkFiles } from "../../src/survey/walk.ts";
import { assemble } from "../../src/total/assemble.ts";
import { gaugeEvidence, judgeContext } from "../../src/total/gauge-evidence.ts";
import type { UnitJob, UnitResult } from "../../src/total/job.ts";
import { learnBeforehand } from "../../src/total/learned-run.ts";
import { pairGauges } from "../../src/total/pair-gauges.ts";
import { prepareRun } from "../../src/total/prepare.ts";
import { runUnit } from "../../src/total/run-unit.ts";
import { leftOutLog } from "../../src/ui/left-out.ts";
import { SILENT } from "../ablation/run-variant.ts";
import { merged, type Overlay } from "../ablation/variants.ts";

/** A gauge as the generator knows it. */
export interface TrueGauge {
  readonly network: string;
  readonly id: string;
  readonly trueMm: number;
  /** Null for a sound one. */
  readonly fault: string | null;
}

/** A world after its `total` job: all that its gauges are judged by, and what is true of them. */
export interface FaultWorld {
  readonly world: string;
  readonly seed: number;
  readonly evidence: readonly GaugeEvidence[];
  readonly context: JudgeContext;
  /** What the run said of gauges that it left out: "network id", by the log. */
  readonly leftOut: readonly string[];
  readonly gauges: readonly TrueGauge[];
}

/** The clock of the network whose stamps name no zone: what its README says, as a user would write it. */
const SALTWATER = { network: "saltwater", zone: "UTC+01:00" };

/**
 * Runs the `total` job on a world by a fresh plan, without leaving anything on disk.
 *
 * @param makeWorld - makes the world, if need be, and gives its folder
 * @param keep - folder in which what the run gave is kept, to be judged anew; undefined to run each time
 */
export async function gatherFaults(
  makeWorld: () => string,
  world: string,
  seed: number,
  keep: string | undefined,
): Promise<FaultWorld> {
  const kept = keep === undefined ? undefined : path.join(keep, `${world}-${seed}.bin`);
  if (kept !== undefined && existsSync(kept)) return deserialize(readFileSync(kept)) as FaultWorld;
  const folder = makeWorld();
  const gathered = { world, seed, ...(await runWorld(folder)), gauges: trueGauges(folder) };
  if (kept !== undefined) {
    mkdirSync(path.dirname(kept), { recursive: true });
    writeFileSync(`${kept}.part`, serialize(gathered));
    renameSync(`${kept}.part`, kept);
  }
  return gathered;
}

async function runWorld(folder: string): Promise<Pick<FaultWorld, "evidence" | "context" | "leftOut">> {
  const planFile = path.join(folder, `plan-faults-${process.pid}.yaml`);
  const inputs = ["radar", "gauges", "catchments.geojson", "terrain.tif"].map((name) =>
    path.join(folder, name),
  );
  const result = await survey(inputs, walkFiles(inputs), SILENT);
  const plan = parse(composePlan(result, folder, "bench")) as Overlay;
  const gauges = (plan.gauges as readonly Overlay[]).map((entry) =>
    entry.network === SALTWATER.network ? { ...entry, ...SALTWATER } : entry,
  );
  writeFileSync(planFile, JSON.stringify({ ...merged(plan, { rain: { headlineRelations: [] } }), gauges }));
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
    return {
      evidence: gaugeEvidence(run, total, pairGauges(run, total)),
      context: judgeContext(run, total),
      leftOut: log.all.filter(({ kind }) => kind === "gauge left out").map(({ where }) => where),
    };
  } finally {
    rmSync(planFile, { force: true });
  }
}

interface TruthFile {
  readonly gauges: readonly {
    readonly network: string;
    readonly id: string;
    readonly trueTotalMm: number;
    readonly fault: string | null;
  }[];
}

function trueGauges(folder: string): TrueGauge[] {
  const { gauges } = JSON.parse(readFileSync(path.join(folder, "truth/truth.json"), "utf8")) as TruthFile;
  return gauges.map(({ network, id, trueTotalMm, fault }) => ({ network, id, trueMm: trueTotalMm, fault }));
}
