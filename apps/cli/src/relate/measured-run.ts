import { mkdtempSync, rmSync, statSync } from "node:fs";
import { tmpdir } from "node:os";
import path from "node:path";
import { cutWindow, durationMs } from "@rainreckon/accumulation";
import { InputError, type Interval, type Pair } from "@rainreckon/core";
import { type GaugeVerdict, judgeGauges, makePairs } from "@rainreckon/verification";
import { openRun } from "../explain/open-run.ts";
import { loadPlan } from "../plan/load.ts";
import { assemble } from "../total/assemble.ts";
import { gaugeEvidence, judgeContext } from "../total/gauge-evidence.ts";
import type { GaugeInput } from "../total/gauges.ts";
import { learnBeforehand } from "../total/learned-run.ts";
import { type PairedGauge, pairGauges } from "../total/pair-gauges.ts";
import { type PreparedRun, prepareRun } from "../total/prepare.ts";
import { runUnit } from "../total/run-unit.ts";
import { unitStore } from "../total/unit-store.ts";
import type { LeftOutLog } from "../ui/left-out.ts";
import { progressBar } from "../ui/progress.ts";
import type { Terminal } from "../ui/terminal.ts";
import { type PlaceEcho, PlaceTracer } from "./place-echo.ts";
import { whatIsLeftAside } from "./plan-conversion.ts";

/** A gauge with the reflectivity over it. */
export interface MeasuredGauge {
  readonly gauge: GaugeInput;
  readonly verdict: GaugeVerdict;
  readonly echo: PlaceEcho;
  /** By the relation of the plan, for what does not change with the relation. */
  readonly paired: PairedGauge;
}

/** What gauges and radars saw of a window, before any relation. */
export interface MeasuredRun {
  /** "run" was made again from the files of its manifest. */
  readonly kind: "run" | "plan";
  readonly target: string;
  readonly run: PreparedRun;
  readonly gauges: readonly MeasuredGauge[];
  readonly remarks: readonly string[];
}

/**
 * Takes the scans of a finished run, or of a plan, through every step but the relation, and keeps the reflectivity over
 * the gauges. Gauges are judged as `total` judges them.
 *
 * @param target - the folder of a run, or a plan
 * @param planPath - where the plan of a run lies, if not where the run found it
 * @throws InputError (kind "usage") as `openRun`, `loadPlan`; where there is no gauge
 */
export async function measuredRun(
  target: string,
  planPath: string | undefined,
  log: LeftOutLog,
  terminal: Terminal,
): Promise<MeasuredRun> {
  const progressOf = (count: number, noun: string) => progressBar(terminal, count, noun);
  const isFolder = statSync(target, { throwIfNoEntry: false })?.isDirectory() === true;
  const { run, remarks } = isFolder
    ? await openRun(target, planPath, terminal, progressOf)
    : { run: await planned(target, log, progressOf), remarks: [] };
  if (run.gauges.gauges.length === 0) {
    throw new InputError("there is no gauge to hold relations against", target, "add gauges to the plan", {
      kind: "usage",
    });
  }
  // Other relations of the headline have no part in this.
  const lean: PreparedRun = {
    ...run,
    shape: { ...run.shape, variants: [], headlineCells: new Int32Array() },
  };
  const tracer = new PlaceTracer(lean.shape.gaugeCells);
  const { paired, verdicts } = await worked(lean, tracer, terminal);
  return {
    kind: isFolder ? "run" : "plan",
    target,
    run: lean,
    remarks: [...remarks, ...whatIsLeftAside(run.loaded.plan)],
    gauges: lean.gauges.gauges.map((gauge, g) => ({
      gauge,
      verdict: verdicts[g] as GaugeVerdict,
      echo: tracer.echoes[g] as PlaceEcho,
      paired: paired[g] as PairedGauge,
    })),
  };
}

async function planned(
  target: string,
  log: LeftOutLog,
  progressOf: Parameters<typeof prepareRun>[2],
): Promise<PreparedRun> {
  const loaded = await loadPlan(target);
  for (const notice of loaded.notices) log.add("file not found", notice);
  return learnBeforehand(await prepareRun(loaded, log, progressOf), log);
}

async function worked(
  run: PreparedRun,
  tracer: PlaceTracer,
  terminal: Terminal,
): Promise<{ readonly paired: PairedGauge[]; readonly verdicts: GaugeVerdict[] }> {
  const scratch = mkdtempSync(path.join(tmpdir(), "rainreckon-relate-"));
  const clear = () => rmSync(scratch, { recursive: true, force: true });
  // An interrupted command must not leave the results of its units behind.
  process.once("exit", clear);
  try {
    const store = unitStore(scratch);
    const progress = progressBar(terminal, run.jobs.length, "units of work");
    for (const job of run.jobs) {
      store.save(job, await runUnit(run.shape, job, tracer));
      progress.advance();
    }
    progress.end();
    const total = assemble(run.shape, run.jobs, store, run.window.endEpochMs - run.window.startEpochMs);
    const paired = pairGauges(run, total);
    return { paired, verdicts: judgeGauges(gaugeEvidence(run, total, paired), judgeContext(run, total)) };
  } finally {
    process.off("exit", clear);
    clear();
  }
}

/** Gauges that may say what a relation is worth. */
export function trustedGauges({ gauges }: MeasuredRun): MeasuredGauge[] {
  return gauges.filter(({ verdict }) => verdict.trusted);
}

/** The intervals that pairs are made over. @throws RangeError where they are no whole steps */
export function pairIntervals({ run }: MeasuredRun, intervalMs: number | undefined): Interval[] {
  const length = intervalMs ?? durationMs(run.loaded.plan.pairs.interval);
  if (length % run.stepMs !== 0) {
    throw new InputError(
      `pairs of ${length / 60_000} min are no whole steps of the run, which are ${run.stepMs / 60_000} min`,
      "command line, --interval",
      `take a multiple of ${run.stepMs / 60_000} min`,
      { kind: "usage" },
    );
  }
  return cutWindow(run.window, length, run.window.startEpochMs % run.stepMs);
}

/**
 * Pairs of a gauge with an integral of its echo in place of the radar's depth, by the rules of all pairs: over the time
 * that both sides observed.
 *
 * @param integral - shape [steps], NaN where not observed
 */
export function pairsWith(
  { run }: MeasuredRun,
  { gauge, echo, paired }: MeasuredGauge,
  integral: Float64Array,
  intervals: readonly Interval[],
): readonly Pair[] {
  const { radarId, rangeKm, beamHeightAslM } = paired.whole;
  return makePairs({
    series: gauge.series,
    radar: {
      startEpochMs: run.window.startEpochMs,
      stepMs: run.stepMs,
      depthMm: integral,
      observedFraction: echo.observedFraction,
    },
    intervals,
    minCommonFraction: run.loaded.plan.pairs.minCommonFraction,
    radarId,
    rangeKm,
    beamHeightAslM,
  }).byInterval;
}
