import { existsSync, mkdirSync, readFileSync, renameSync, writeFileSync } from "node:fs";
import path from "node:path";
import { deserialize, serialize } from "node:v8";
import type { GaugeEvidence, JudgeContext } from "@rainreckon/verification";
import { gaugeEvidence, judgeContext } from "../../src/total/gauge-evidence.ts";
import { pairGauges } from "../../src/total/pair-gauges.ts";
import { runWorld } from "../shared/run-world.ts";

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
  const gathered = { world, seed, ...(await judgedBy(folder)), gauges: trueGauges(folder) };
  if (kept !== undefined) {
    mkdirSync(path.dirname(kept), { recursive: true });
    writeFileSync(`${kept}.part`, serialize(gathered));
    renameSync(`${kept}.part`, kept);
  }
  return gathered;
}

async function judgedBy(folder: string): Promise<Pick<FaultWorld, "evidence" | "context" | "leftOut">> {
  const { run, total, notices } = await runWorld(folder, {});
  return {
    evidence: gaugeEvidence(run, total, pairGauges(run, total)),
    context: judgeContext(run, total),
    leftOut: notices.filter(({ kind }) => kind === "gauge left out").map(({ where }) => where),
  };
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
