import { counted, decimals, fixedDecimals } from "../ui/numbers.ts";
import { textTable } from "../ui/table.ts";
import type { Terminal } from "../ui/terminal.ts";
import type { FittedPairs } from "./fit.ts";
import type { RelationFitResult } from "./fit-schema.ts";
import { textPlot } from "./text-plot.ts";
import { wrapped } from "./wrapped.ts";

type Fit = RelationFitResult["fits"][number];
type Interval = Fit["aInterval"];

/** Fitted relations for people, in 80 columns. */
export function fitText({ result, pairs }: FittedPairs, terminal: Terminal): string {
  const { reference, offered } = result;
  const law = offered ?? undefined;
  const plot = textPlot(pairs.dbz, pairs.rateMmPerHour, [
    { letter: "r", a: reference.a, b: reference.b },
    ...(law === undefined ? [] : [{ letter: "F", a: law.a, b: law.b }]),
  ]);
  const key =
    law === undefined ? `r ${reference.name}` : `F offered, Z = ${law.a} R^${law.b}    r ${reference.name}`;
  return [
    terminal.strong(headline(result)),
    ...about(result),
    "",
    fitTable(result),
    "",
    ...notes(result).flatMap(bullet),
    ...(plot.length === 0 ? [] : ["", ...plot, `  ${key}    . : # pairs`]),
    "",
    ...conclusion(result).flatMap((line) => (line.startsWith("  relation:") ? [line] : wrapped(line))),
  ].join("\n");
}

function headline({ source, pairs }: RelationFitResult): string {
  const gauges = source.gaugeCount === null ? "" : ` of ${counted(source.gaugeCount, "gauge")}`;
  const length = source.intervalMinutes === null ? "" : ` over ${decimals(source.intervalMinutes, 1)} min`;
  return `Relations fitted to ${counted(pairs.count, "pair")}${gauges}${length}`;
}

function about({ source, pairs }: RelationFitResult): string[] {
  const span = source.start === null ? "" : `, ${source.start} to ${source.end}`;
  const { rateMmPerHour: rate, dbz } = pairs;
  const range = ({ least, p10, p90, greatest }: typeof rate, unit: string, digits: number) =>
    `${fixedDecimals(least, digits)} to ${fixedDecimals(greatest, digits)} ${unit} (80 % from ${fixedDecimals(p10, digits)} to ${fixedDecimals(p90, digits)})`;
  const lines = [
    `${source.name}${span}`,
    `wet on both sides ${pairs.wetOnBothSides}, on either ${pairs.wetOnEitherSide}; wet is from ${pairs.leastRateMmPerHour} mm/h or ${fixedDecimals(pairs.leastDbz, 1)} dBZ on`,
  ];
  if (pairs.wetOnBothSides > 0) {
    lines.push(
      `rates ${range(rate, "mm/h", 1)}`,
      `reflectivities ${range(dbz, "dBZ", 1)}; correlation of the logs ${fixedDecimals(pairs.correlation, 2)}`,
    );
  }
  return lines.flatMap((line) => wrapped(`  ${line}`));
}

function fitTable({ fits, reference }: RelationFitResult): string {
  const level = Math.round(100 * (fits[0]?.aInterval.level ?? 0));
  return textTable(
    [
      { head: "fit" },
      { head: "A", align: "right" },
      { head: `${level} %`, align: "right" },
      { head: "b", align: "right" },
      { head: `${level} %`, align: "right" },
      { head: "R/G", align: "right" },
      { head: "error", align: "right" },
    ],
    [
      ...fits.map((fit) => [
        fit.title,
        coefficient(fit.a),
        between(fit.aInterval, coefficient),
        fixedDecimals(fit.b, 2),
        fit.name === "fixed-b" ? "held" : between(fit.bInterval, (value) => fixedDecimals(value, 2)),
        fixedDecimals(fit.error.biasRatio, 2),
        fixedDecimals(fit.error.rootMeanSquareErrorMmPerHour, 2),
      ]),
      [
        reference.name,
        coefficient(reference.a),
        "",
        fixedDecimals(reference.b, 2),
        "",
        fixedDecimals(reference.error.biasRatio, 2),
        fixedDecimals(reference.error.rootMeanSquareErrorMmPerHour, 2),
      ],
    ],
  );
}

function notes(result: RelationFitResult): string[] {
  const { source, pairs, fits, cap, offered } = result;
  const lines = [
    "R/G is the sum of rates, radar over gauge; error the root mean square in mm/h. Both on the pairs that were fitted: at other gauges they are larger (relate rank).",
    `Intervals by drawing with replacement: ${pairs.drawn}. A and b move together: not every corner of both intervals is meant.`,
  ];
  const pivot = fits.find(({ name }) => name === (offered?.name ?? "bias-free"));
  if (pairs.pivotRateMmPerHour !== null && pivot?.pivotDbz != null) {
    lines.push(
      `What the pairs hold best: at ${pairs.pivotRateMmPerHour.toPrecision(2)} mm/h ${fixedDecimals(pivot.pivotDbz, 1)} dBZ (${between(pivot.pivotInterval, (value) => fixedDecimals(value, 1))}), whatever A and b.`,
    );
  }
  if (source.averagingExponent !== null) {
    const { averagingExponent: exponent, bFromMeanZ } = source;
    const other =
      bFromMeanZ === null ? "no b could be fitted" : `the bias-free b would be ${bFromMeanZ.toFixed(2)}`;
    lines.push(
      `Reflectivity of a pair: (mean of Z^(1/b))^b over gates and minutes with b = ${exponent.toFixed(2)}, so that steady rain of it gives the same depth; with the plain mean of Z ${other}. What varies inside a gate, and between two scans, is averaged all the same.`,
    );
  }
  if (cap.shareAbove !== null) {
    const share = decimals(100 * cap.shareAbove, 1);
    const level = `${decimals(cap.dbz, 1)} dBZ, where the cap cuts; fits know no cap`;
    lines.push(
      source.kind === "pairs"
        ? `${share} % of the pairs lie at or above ${level}.`
        : `${share} % of the rain comes from gates at or above ${level}.`,
    );
  }
  for (const { reason, count } of source.leftOut.slice(0, 4)) {
    lines.push(`Left out: ${counted(count, source.kind === "pairs" ? "row" : "pair")}, ${reason}.`);
  }
  for (const { title, name, warnings, reason } of fits) {
    // Those of fits that nobody will use are in the JSON.
    if (name === offered?.name) lines.push(...warnings.map((warning) => `Mind, ${title}: ${warning}.`));
    if (reason !== undefined) lines.push(`No relation by ${title}: ${reason}.`);
  }
  lines.push(...source.remarks.map((remark) => `Mind: ${remark}.`));
  return lines;
}

function conclusion({ doubts, offered, source }: RelationFitResult): string[] {
  const lines: string[] = [];
  if (doubts.length > 0) {
    lines.push("These pairs cannot tell A from b:", ...doubts.map(({ words }) => `  - ${words}`), "");
  }
  if (offered === null) {
    lines.push("No relation is offered: these pairs hold none.");
    return lines;
  }
  lines.push(
    `Offered: Z = ${offered.a} R^${offered.b}, since ${offered.why}. For each radar of the plan:`,
    `  ${offered.planLine}`,
  );
  if (source.kind !== "pairs") {
    lines.push(
      "Gauges that a relation was fitted to say nothing of how good it is, and an adjustment by the same gauges takes up most of A.",
    );
  }
  return lines;
}

function bullet(line: string): string[] {
  return wrapped(`  ${line}`);
}

function coefficient(value: number | null): string {
  return value === null ? "–" : String(Number(value.toPrecision(3)));
}

function between({ low, high }: Interval, digits: (value: number) => string): string {
  return low === null || high === null ? "–" : `${digits(low)} to ${digits(high)}`;
}
