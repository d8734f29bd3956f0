import { METHOD_NAMES, type MethodName } from "@rainreckon/adjustment";
import { type Column, textTable } from "../../src/ui/table.ts";
import { median } from "../ablation/scores.ts";
import type { CandidateScore, Measured } from "./evaluate.ts";
import { GAUGES_ALONE, VARIES_IN_SPACE, YARDSTICK } from "./worlds.ts";

const right = (head: string): Column => ({ head, align: "right" });
const digits = (value: number, count = 2) => (Number.isFinite(value) ? value.toFixed(count) : "–");
const percent = (share: number, places = 0) =>
  Number.isFinite(share) ? `${(100 * share).toFixed(places)} %` : "–";

export function candidateOf(run: Measured, name: MethodName): CandidateScore {
  const found = run.candidates.find((one) => one.name === name);
  if (found === undefined) throw new RangeError(`${run.world}: no candidate ${name}`);
  return found;
}

/** RMSE of the storm total of a candidate, over that of the mean-field bias. */
export function ofYardstick(run: Measured, name: MethodName): number {
  return candidateOf(run, name).total.rmseMm / candidateOf(run, YARDSTICK).total.rmseMm;
}

/** Largest over smallest RMSE among candidates that use radar and gauges, less 1. */
export function spreadOf(run: Measured): number {
  const errors = run.candidates
    .filter(({ name }) => name !== "none" && name !== GAUGES_ALONE)
    .map(({ total }) => total.rmseMm);
  return Math.max(...errors) / Math.min(...errors) - 1;
}

/** By how much what was chosen is worse than the best of all candidates. */
export function regretOf(run: Measured): number {
  const best = Math.min(...run.candidates.map(({ total }) => total.rmseMm));
  return candidateOf(run, run.chosen).total.rmseMm / best - 1;
}

/** The scores of one world, a line a candidate; of several seeds the medians. */
export function worldTable(runs: readonly Measured[]): string {
  const columns = [
    { head: "method" },
    ...[
      "RMSE mm",
      "of bias",
      "bias",
      "KGE′",
      "hourly RMSE mm",
      "bias",
      "KGE′",
      "held out mm",
      "by clusters mm",
      "chosen",
    ].map(right),
  ];
  const rows = METHOD_NAMES.map((name) => {
    const over = (figure: (candidate: CandidateScore) => number) =>
      median(runs.map((run) => figure(candidateOf(run, name))));
    return [
      name,
      digits(over(({ total }) => total.rmseMm)),
      percent(median(runs.map((run) => ofYardstick(run, name)))),
      digits(over(({ total }) => total.biasRatio)),
      digits(over(({ total }) => total.klingGupta)),
      digits(over(({ hourly }) => hourly.rmseMm)),
      digits(over(({ hourly }) => hourly.biasRatio)),
      digits(over(({ hourly }) => hourly.klingGupta)),
      digits(over(({ heldOutMm }) => heldOutMm)),
      digits(over(({ clusterHeldOutMm }) => clusterHeldOutMm)),
      String(runs.filter(({ chosen }) => chosen === name).length),
    ];
  });
  const [{ world }] = runs;
  const seeds = runs.map(({ seed }) => seed).join(", ");
  const gauges = runs.map(({ gauges: used, notTrusted }) => `${used}+${notTrusted}`).join(", ");
  return `${world}, seeds ${seeds}: gauges trusted + not trusted ${gauges}; spread ${percent(median(runs.map(spreadOf)))}, regret ${percent(median(runs.map(regretOf)), 1)}\n${textTable(columns, rows)}`;
}

/** A line a world: what was chosen against the yardsticks; medians over seeds, and the worst. */
export function summaryTable(runs: readonly Measured[]): string {
  const worlds = [...new Set(runs.map(({ world }) => world))];
  const columns = [
    { head: "world" },
    { head: "error varies" },
    ...[
      "seeds",
      "radar mm",
      "bias mm",
      "gauges alone mm",
      "chosen mm",
      "of bias",
      "worst",
      "KGE′ bias",
      "KGE′ chosen",
      "spread",
      "regret",
    ].map(right),
  ];
  const rows = worlds.map((world) => {
    const own = runs.filter((run) => run.world === world);
    const of = (name: (run: Measured) => MethodName, figure: (candidate: CandidateScore) => number) =>
      median(own.map((run) => figure(candidateOf(run, name(run)))));
    const rmse = ({ total }: CandidateScore) => total.rmseMm;
    const kge = ({ total }: CandidateScore) => total.klingGupta;
    const chosen = (run: Measured) => run.chosen;
    const ratios = own.map((run) => ofYardstick(run, run.chosen));
    return [
      world,
      world in VARIES_IN_SPACE ? "in space" : "",
      String(own.length),
      digits(of(() => "none", rmse)),
      digits(of(() => YARDSTICK, rmse)),
      digits(of(() => GAUGES_ALONE, rmse)),
      digits(of(chosen, rmse)),
      percent(median(ratios)),
      percent(Math.max(...ratios)),
      digits(
        of(() => YARDSTICK, kge),
        3,
      ),
      digits(of(chosen, kge), 3),
      percent(median(own.map(spreadOf))),
      percent(median(own.map(regretOf)), 1),
    ];
  });
  return textTable(columns, rows);
}

/** What the aims come to, in words. */
export function aimLines(runs: readonly Measured[]): string[] {
  const judged = runs.filter(({ refused }) => refused === "");
  const named = (some: readonly Measured[]) =>
    some.length === 0 ? "" : ` (${some.map(({ world, seed }) => `${world}/${seed}`).join(", ")})`;
  const verdict = (isMet: boolean) => (isMet ? "met" : "NOT MET");
  const ratio = (run: Measured) => ofYardstick(run, run.chosen);
  const inSpace = judged.filter(({ world }) => world in VARIES_IN_SPACE);
  const elsewhere = judged.filter(({ world }) => !(world in VARIES_IN_SPACE));
  const middle = median(inSpace.map(ratio));
  const above = inSpace.filter((run) => ratio(run) > 0.9);
  const worse = elsewhere.filter((run) => ratio(run) > 1.05);
  const beaten = judged.filter(
    (run) => candidateOf(run, run.chosen).total.rmseMm >= candidateOf(run, GAUGES_ALONE).total.rmseMm,
  );
  const apart = judged.filter((run) => spreadOf(run) > 0.2);
  const regret = apart.reduce((sum, run) => sum + regretOf(run), 0) / apart.length;
  const refused = runs.filter((run) => run.refused !== "");
  return [
    `RMSE of the storm total against a mean-field bias, where the error varies in space: median ${percent(middle)} of ${inSpace.length} runs; aim at most 60 %: ${verdict(middle <= 0.6)}`,
    `  above 90 %: ${above.length}${named(above)}; aim none: ${verdict(above.length === 0)}`,
    `elsewhere worse by more than 5 %: ${worse.length} of ${elsewhere.length}${named(worse)}; aim none: ${verdict(worse.length === 0)}`,
    `not below the gauges alone: ${beaten.length} of ${judged.length}${named(beaten)}; aim none: ${verdict(beaten.length === 0)}`,
    `mean regret where candidates spread by more than 20 %: ${percent(regret, 1)} of ${apart.length} runs; aim at most 5 %: ${verdict(regret <= 0.05)}`,
    ...(refused.length === 0
      ? []
      : [
          `not adjusted at all: ${refused.map(({ world, seed, refused: why }) => `${world}/${seed}: ${why}`).join("; ")}`,
        ]),
  ];
}
