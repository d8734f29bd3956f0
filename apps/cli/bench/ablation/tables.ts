import { type Column, textTable } from "../../src/ui/table.ts";
import type { Measured, TwoScores, VariantScore } from "./measure.ts";
import { median, RANGE_BANDS_KM } from "./scores.ts";
import { ALL, CAPPED_AND_MASKED, OFFERS_TAKEN, RAW, STEP_WITHOUT_WORK, STEPS, without } from "./variants.ts";

const BANDS = [...RANGE_BANDS_KM.map((km) => `<${km} km`), "beyond"];
const right = (head: string): Column => ({ head, align: "right" });
const digits = (value: number, count: number) => (Number.isFinite(value) ? value.toFixed(count) : "–");
const percent = (share: number, places = 0) =>
  Number.isFinite(share) ? `${(100 * share).toFixed(places)} %` : "–";

export function scoreOf(run: Measured, name: string): VariantScore {
  const score = run.scores.find((one) => one.name === name);
  if (score === undefined) throw new RangeError(`${run.world}: no variant ${name}`);
  return score;
}

/** RMSE of a map over that of raw on all cells, and over that of the capped and masked on clutter-free cells. */
function ratios(run: Measured, { all, clutterFree }: TwoScores): readonly [number, number] {
  return [
    all.rmseMm / scoreOf(run, RAW.name).all.rmseMm,
    clutterFree.rmseMm / scoreOf(run, CAPPED_AND_MASKED.name).clutterFree.rmseMm,
  ];
}

/** The scores of one world, a line a variant; of several seeds the medians. */
export function worldTable(runs: readonly Measured[]): string {
  const columns = [
    { head: "variant" },
    ...["RMSE mm", "of raw", "bias", "corr.", "RMSE mm*", "of masked*", "bias*", "corr.*"].map(right),
    ...BANDS.map((band) => right(`bias* ${band}`)),
    right("not observed"),
    right("s"),
  ];
  const line = (
    name: string,
    of: (run: Measured) => TwoScores,
    rest: readonly string[],
  ): readonly string[] => {
    const over = (figure: (score: TwoScores, run: Measured) => number) =>
      median(runs.map((run) => figure(of(run), run)));
    return [
      name,
      digits(
        over(({ all }) => all.rmseMm),
        2,
      ),
      percent(over((score, run) => ratios(run, score)[0])),
      digits(
        over(({ all }) => all.biasRatio),
        2,
      ),
      digits(
        over(({ all }) => all.correlation),
        3,
      ),
      digits(
        over(({ clutterFree }) => clutterFree.rmseMm),
        2,
      ),
      percent(over((score, run) => ratios(run, score)[1])),
      digits(
        over(({ clutterFree }) => clutterFree.biasRatio),
        2,
      ),
      digits(
        over(({ clutterFree }) => clutterFree.correlation),
        3,
      ),
      ...BANDS.map((_, band) =>
        digits(
          over(({ clutterFree }) => clutterFree.biasByRange[band]),
          2,
        ),
      ),
      ...rest,
    ];
  };
  const rows = runs[0].scores.map(({ name }) => {
    const over = (figure: (score: VariantScore) => number) =>
      median(runs.map((run) => figure(scoreOf(run, name))));
    return line(name, (run) => scoreOf(run, name), [
      digits(
        over(({ unobservedCells }) => unobservedCells),
        0,
      ),
      digits(
        over(({ seconds }) => seconds),
        1,
      ),
    ]);
  });
  rows.push(line("(faultless scans)", ({ sampling }) => sampling, ["–", "–"]));
  const leftOut = median(runs.map(({ leftOutCells }) => leftOutCells));
  const seeds = runs.map(({ seed }) => seed).join(", ");
  return [
    `${runs[0].world}, seed${runs.length > 1 ? "s" : ""} ${seeds}: ${runs[0].cells} cells, ${leftOut} left out that some variant did not observe`,
    textTable(columns, rows),
  ].join("\n");
}

/** Runs of each world, in the order in which they come. */
function byWorld(runs: readonly Measured[]): ReadonlyMap<string, readonly Measured[]> {
  const worlds = new Map<string, Measured[]>();
  for (const run of runs) worlds.set(run.world, [...(worlds.get(run.world) ?? []), run]);
  return worlds;
}

/** A line a world: how far raw, masked and all are from the truth; of several seeds the medians. */
export function summaryTable(runs: readonly Measured[]): string {
  const columns = [
    { head: "world" },
    ...[
      "seeds",
      "raw mm",
      "masked mm",
      "all mm",
      "of raw",
      "raw mm*",
      "masked mm*",
      "all mm*",
      "of masked*",
    ].map(right),
    ...["bias raw", "bias masked", "bias all", "corr. raw", "corr. all", "offers taken mm", "left out"].map(
      right,
    ),
  ];
  const rows = [...byWorld(runs)].map(([world, some]) => {
    const over = (name: string, figure: (score: VariantScore, run: Measured) => number) =>
      median(some.map((run) => figure(scoreOf(run, name), run)));
    const names = [RAW.name, CAPPED_AND_MASKED.name, ALL.name];
    return [
      world,
      String(some.length),
      ...names.map((name) =>
        digits(
          over(name, ({ all }) => all.rmseMm),
          2,
        ),
      ),
      percent(over(ALL.name, (score, run) => ratios(run, score)[0])),
      ...names.map((name) =>
        digits(
          over(name, ({ clutterFree }) => clutterFree.rmseMm),
          2,
        ),
      ),
      percent(over(ALL.name, (score, run) => ratios(run, score)[1])),
      ...names.map((name) =>
        digits(
          over(name, ({ all }) => all.biasRatio),
          2,
        ),
      ),
      ...[RAW.name, ALL.name].map((name) =>
        digits(
          over(name, ({ all }) => all.correlation),
          3,
        ),
      ),
      digits(
        over(OFFERS_TAKEN, ({ all }) => all.rmseMm),
        2,
      ),
      digits(median(some.map(({ leftOutCells }) => leftOutCells)), 0),
    ];
  });
  return `RMSE, bias and correlation of the storm total by world, medians over seeds\n${textTable(columns, rows)}`;
}

/** What each step is worth: by how much the RMSE grows without it. Steps by worlds. */
export function stepTable(runs: readonly Measured[]): string {
  const worlds = byWorld(runs);
  const rows = STEPS.map(({ name }) => [
    name,
    ...[...worlds.values()].map((some) => {
      const growth = median(
        some.map(
          (run) => scoreOf(run, without(name).name).all.rmseMm / scoreOf(run, ALL.name).all.rmseMm - 1,
        ),
      );
      return `${growth > 0 ? "+" : ""}${(100 * growth).toFixed(0)}`;
    }),
  ]);
  const columns = [{ head: "without" }, ...[...worlds.keys()].map((world) => right(world))];
  return `RMSE without one step, against all, in %, all cells: above 0 the step pays\n${textTable(columns, rows)}`;
}

const judged = (met: boolean) => (met ? "met" : "NOT MET");
const nameOf = ({ world, seed }: Measured) => `${world}/${seed}`;

/** The aims over all worlds and seeds, with whether they are met. */
export function aimLines(runs: readonly Measured[]): string[] {
  const both = runs.map((run) => ratios(run, scoreOf(run, ALL.name)));
  const ofRaw = median(both.map(([share]) => share));
  const ofMasked = median(both.map(([, share]) => share));
  const worse = runs.filter((_, k) => both[k][0] > 1);
  return [
    `RMSE of the storm total, of raw, all cells: median ${percent(ofRaw)}; aim 40 %: ${judged(ofRaw <= 0.4)}`,
    `RMSE of the storm total, of capped and masked, clutter-free cells: median ${percent(ofMasked)}; aim 60 %: ${judged(ofMasked <= 0.6)}`,
    `worse than raw: ${worse.length} of ${runs.length}; aim none: ${judged(worse.length === 0)}${worse.length > 0 ? ` (${worse.map(nameOf).join(", ")})` : ""}`,
  ];
}

/** What each screen takes of true rain, the worst of all worlds and seeds. */
export function tollTable(runs: readonly Measured[]): string {
  const rows = runs[0].tolls.map(({ screen }, s) => {
    const worst = (figure: "share" | "shareOfAllGates" | "worstCell"): [string, string] => {
      const run = runs.reduce((a, b) => (b.tolls[s][figure] > a.tolls[s][figure] ? b : a));
      return [percent(run.tolls[s][figure], 2), run.tolls[s][figure] > 0 ? nameOf(run) : ""];
    };
    const mid = median(runs.map(({ tolls }) => tolls[s].share));
    return [screen, percent(mid, 2), ...worst("share"), ...worst("worstCell"), ...worst("shareOfAllGates")];
  });
  return [
    "True rain below screened gates, lowest sweeps, filling not counted; aims: at most 1 % of it, and 5 % in a cell above 5 mm",
    textTable(
      [
        { head: "screen" },
        right("median"),
        right("worst"),
        { head: "in" },
        right("worst cell"),
        { head: "in" },
        right("with gates of false echo"),
        { head: "in" },
      ],
      rows,
    ),
  ].join("\n");
}

/** Planted calibration errors against what is offered: how near, and how often something is offered where nothing was planted. */
export function calibrationLines(runs: readonly Measured[]): string[] {
  const signed = (db: number) => (Number.isNaN(db) ? "none" : `${db >= 0 ? "+" : ""}${db.toFixed(1)}`);
  const radars = runs.flatMap((run) => run.calibration.map((score) => ({ run, score })));
  const planted = radars.filter(({ score }) => score.plantedDb !== 0);
  const near = planted.filter(({ score }) => Math.abs(score.errorDb - score.plantedDb) <= 0.7);
  const none = radars.filter(({ score }) => score.plantedDb === 0);
  const falsely = none.filter(({ score }) => !Number.isNaN(score.offsetDb));
  const told = [...planted.filter((one) => !near.includes(one)), ...falsely].map(
    ({ run, score }) =>
      `${nameOf(run)} ${score.node}: planted ${signed(score.plantedDb)} dB, found ${signed(score.errorDb)} (${signed(score.lowDb)} to ${signed(score.highDb)}), offered ${signed(score.offsetDb)}`,
  );
  return [
    `calibration error found within 0.7 dB: ${near.length} of ${planted.length} radars with one; aim 8 of 10: ${judged(near.length >= 0.8 * planted.length)}`,
    `offered where none was planted: ${falsely.length} of ${none.length} radars; aim none: ${judged(falsely.length === 0)}`,
    ...told.map((line) => `  ${line}`),
  ];
}

/** How far a step moves the map of a world that has nothing for it to do. */
export function idleLines(runs: readonly Measured[]): string[] {
  return runs.flatMap((run) => {
    const step = STEP_WITHOUT_WORK[run.world];
    if (step === undefined) return [];
    const on = scoreOf(run, ALL.name).extremes;
    const off = scoreOf(run, without(step).name).extremes;
    const [wet, peak] = [on.wet95Mm / off.wet95Mm - 1, on.peakHourMm / off.peakHourMm - 1];
    const signed = (share: number) => `${share >= 0 ? "+" : ""}${percent(share, 1)}`;
    return [
      `${nameOf(run)}, ${step}: 95th percentile of wet cells ${signed(wet)}, peak hour ${signed(peak)}; aim below 2 %: ${judged(Math.abs(wet) < 0.02 && Math.abs(peak) < 0.02)}`,
    ];
  });
}
