import { existsSync } from "node:fs";
import path from "node:path";
import { formatsReady } from "@rainreckon/formats";
import { loadPlan } from "../src/plan/load.ts";
import type { RunShape, UnitJob } from "../src/total/job.ts";
import { learnBeforehand } from "../src/total/learned-run.ts";
import { type PreparedRun, prepareRun } from "../src/total/prepare.ts";
import { runUnit } from "../src/total/run-unit.ts";
import { leftOutLog } from "../src/ui/left-out.ts";
import { SILENT } from "./ablation/run-variant.ts";
import { cpuSecondsOf, sharesOf } from "./chain/profile.ts";

/** The full chain from echo to rain may take so many times as long for a volume as the plain one. */
const ALLOWED_RATIO = 3;
const REPEATS = 3;

/**
 * What all steps from echo to rain cost, against what a run costs without any of them, in one process and on the same
 * scans: both kinds of run alternate, each once without being timed, and the median of three counts.
 *
 * @param planFile - of a storm whose plan takes every step
 */
export default async function run(planFile: string): Promise<void> {
  if (!existsSync(planFile)) throw new Error(`no plan: ${planFile}`);
  await formatsReady();
  const log = leftOutLog(SILENT);
  const prepared = await prepareRun(await loadPlan(planFile), log, () => ({
    advance: () => undefined,
    end: () => undefined,
  }));
  let taught = prepared;
  const learning = await cpuSecondsOf(async () => {
    taught = await learnBeforehand(prepared, log);
  });
  const full = taught.shape;
  const plain: RunShape = {
    ...full,
    radars: full.radars.map((radar) => ({ ...radar, echo: undefined })),
  };
  const work = async (shape: RunShape, jobs: readonly UnitJob[] = taught.jobs) => {
    for (const job of jobs) await runUnit(shape, job);
  };
  // Lookups of a run are made once, whatever its length.
  await work(plain);
  await work(full);
  const seconds = { plain: [] as number[], full: [] as number[] };
  for (let repeat = 0; repeat < REPEATS; repeat++) {
    seconds.plain.push(await cpuSecondsOf(() => work(plain)));
    seconds.full.push(await cpuSecondsOf(() => work(full)));
  }
  const volumes = volumeCount(taught);
  const perVolume = (values: readonly number[]) => (1000 * median(values)) / volumes;
  const ratios = seconds.full.map((value, k) => value / (seconds.plain[k] as number));
  const ratio = median(ratios);
  console.log(
    `\nFrom echo to rain: ${volumes} volumes of ${full.radars.length} radars, ${taught.jobs.length} units of work, ${path.basename(path.dirname(planFile))}`,
  );
  console.log(
    "CPU time of one thread with its helpers; a volume is all that a run needs of it, grid and sums too",
  );
  console.log(`  plain (decode, table, grid): ${perVolume(seconds.plain).toFixed(1)} ms a volume`);
  console.log(`  full (all steps):            ${perVolume(seconds.full).toFixed(1)} ms a volume`);
  console.log(
    `  ratio: ${ratio.toFixed(2)} (${ratios.map((value) => value.toFixed(2)).join(", ")}), at most ${ALLOWED_RATIO.toFixed(1)}: ${ratio <= ALLOWED_RATIO ? "kept" : "EXCEEDED"}`,
  );
  console.log(
    `  learning beforehand, at most 48 rounds of each radar: ${learning.toFixed(1)} s, as much as ${((1000 * learning) / perVolume(seconds.full)).toFixed(0)} volumes`,
  );
  for (const [name, shape] of [
    ["full", full],
    ["plain", plain],
  ] as const) {
    console.log(`\nWhere the time of the ${name} chain goes, by samples of 0.5 ms`);
    for (const { step, share } of await sharesOf(() => work(shape))) {
      console.log(`  ${(100 * share).toFixed(1).padStart(5)} %  ${step}`);
    }
  }
}

/** Rounds of all radars that lie in the window. */
function volumeCount({ shape, window }: PreparedRun): number {
  return shape.radars.reduce(
    (sum, { rounds }) =>
      sum +
      rounds.filter(
        ({ firstMidEpochMs }) =>
          firstMidEpochMs > window.startEpochMs && firstMidEpochMs <= window.endEpochMs,
      ).length,
    0,
  );
}

function median(values: readonly number[]): number {
  return values.toSorted((a, b) => a - b)[Math.floor(values.length / 2)] as number;
}
