import { counted, decimals, fixedDecimals } from "../ui/numbers.ts";
import { textTable } from "../ui/table.ts";
import type { Terminal } from "../ui/terminal.ts";
import type { RelationRankResult } from "./rank-schema.ts";
import { wrapped } from "./wrapped.ts";

type Rankings = RelationRankResult["relations"];
type Row = Rankings["alone"]["rows"][number];

/** Ranked relations and caps for people, in 80 columns. */
export function rankText(result: RelationRankResult, terminal: Terminal): string {
  const { source, plan, relations } = result;
  const hail =
    source.pairsOfHailOrSnow === 0
      ? ""
      : `; ${counted(source.pairsOfHailOrSnow, "pair")} with hail, melting snow or snow left out`;
  const order = result.order === "alone" ? "alone" : "afterBias";
  const untrusted =
    source.gaugesNotTrusted === 0 ? "" : `; ${counted(source.gaugesNotTrusted, "gauge")} not trusted`;
  return [
    terminal.strong(
      `Relations at ${counted(source.gaugeCount, "trusted gauge")}, ${counted(source.pairCount, "wet pair")} over ${decimals(source.intervalMinutes, 1)} min${untrusted}`,
    ),
    ...wrapped(`  ${source.name}, ${source.start} to ${source.end}`),
    ...wrapped(
      `  mean gauge depth of a pair ${fixedDecimals(source.meanGaugeMm, 2)} mm; cap ${plan.cap} throughout${hail}`,
    ),
    "",
    table("relation", relations, order),
    "",
    ...wrapped(
      `  * best of its column, = not told from it: the ${Math.round(100 * levelOf(relations))} % interval of the difference, by drawing gauges, reaches down to 2 % of the best error. R/G is radar over gauge; errors are root mean squares of pairs in mm and per cent of the mean gauge depth.`,
    ),
    ...wrapped(
      "  After bias: each gauge's depths times gauge/radar of the other gauges, each relation with its own factor. What stays is mostly b: A, the calibration of the radar and the factor cannot be told apart.",
    ),
    "",
    ...verdict(relations, order, plan.name, "relation").flatMap(wrapped),
    "",
    ...capWords(result, order),
    ...source.remarks.flatMap((remark) => wrapped(`  Mind: ${remark}.`)),
    ...wrapped(`Rule: ${result.rule}.`),
  ].join("\n");
}

/** Rows in the order that decides, with both kinds of errors. */
function table(head: string, rankings: Rankings, order: keyof Rankings): string {
  const other = (name: string, mode: keyof Rankings) =>
    rankings[mode].rows.find((row) => row.name === name) as Row;
  const cells = (row: Row, best: string) => [
    `${fixedDecimals(row.errorMm, 2)}${row.name === best ? "*" : row.toldApart ? " " : "="}`,
    fixedDecimals(row.errorPercent, 0),
  ];
  return textTable(
    [
      { head: `${head}, by error` },
      { head: "R/G", align: "right" },
      { head: "alone mm ", align: "right" },
      { head: "%", align: "right" },
      { head: "after bias ", align: "right" },
      { head: "%", align: "right" },
      { head: "more than best", align: "right" },
    ],
    rankings[order].rows.map(({ name }) => {
      const [alone, after] = [other(name, "alone"), other(name, "afterBias")];
      return [
        name,
        fixedDecimals(alone.biasRatio, 2),
        ...cells(alone, rankings.alone.best),
        ...cells(after, rankings.afterBias.best),
        differenceOf(other(name, order), rankings[order].best),
      ];
    }),
  );
}

function differenceOf({ name, moreThanBestMm, interval }: Row, best: string): string {
  if (name === best) return "best";
  if (interval.low === null) return fixedDecimals(moreThanBestMm, 2);
  return `${fixedDecimals(interval.low, 2)} to ${fixedDecimals(interval.high, 2)}`;
}

function levelOf({ alone }: Rankings): number {
  return alone.rows[0]?.interval.level ?? 0;
}

function verdict(rankings: Rankings, order: keyof Rankings, own: string, noun: string): string[] {
  const { rows, best, chosen, choiceErrorMm, chosenInFolds } = rankings[order];
  const level = Math.round(100 * levelOf(rankings));
  const rivals = rows.filter(({ toldApart }) => !toldApart).length;
  const words = order === "alone" ? "as they are" : "after bias";
  const lines = [
    chosen === best && rivals === 1
      ? `Best ${words}: ${best}, told from all others.`
      : `Best ${words}: ${best}; ${rivals - 1} of the others ${rivals === 2 ? "is" : "are"} as good within 2 % and noise.`,
    chosen === own
      ? `The plan's ${noun}, ${own}, may stay: what is better here may be so by chance.`
      : `${chosen} is chosen: the plan's ${noun}, ${own}, is worse by more than chance (${level} %).`,
  ];
  const reason = rows[0]?.interval.reason;
  if (reason !== undefined) lines.push(`No difference can be judged: ${reason}.`);
  if (choiceErrorMm !== null) {
    const times = Object.entries(chosenInFolds)
      .sort(([, one], [, more]) => more - one)
      .slice(0, 3)
      .map(([name, count]) => `${name} ${count} times`);
    lines.push(
      `Chosen anew without each gauge in turn, the rule errs there by ${choiceErrorMm.toFixed(2)} mm (${times.join(", ")}).`,
    );
  }
  return lines;
}

function capWords({ caps, plan }: RelationRankResult, order: keyof Rankings): string[] {
  const met = caps.atCap.filter(({ cap, gatesShare }) => cap !== "none" && gatesShare > 0);
  if (met.length === 0) {
    return wrapped("Caps cannot be ranked: no gate over a trusted gauge reached any of them.");
  }
  const shares = caps.atCap
    .filter(({ cap }) => cap !== "none")
    .map(({ cap, gatesShare }) => `${cap} ${decimals(100 * gatesShare, 1)} %`);
  return [
    table("cap", caps.ranks, order),
    "",
    ...wrapped(
      `  With ${caps.relation}. Pairs with hail count here: ${counted(caps.pairCount, "wet pair")} in all. Rain from gates at or above each: ${shares.join(", ")}.`,
    ),
    "",
    ...verdict(caps.ranks, order, plan.cap, "cap").flatMap(wrapped),
    "",
  ];
}
