import { displayText } from "@rainreckon/formats";
import { decimals, fixedDecimals, utcText } from "../ui/numbers.ts";
import { textTable } from "../ui/table.ts";
import type { AdjustmentAccount, Explanation } from "./schema.ts";

const GAUGES_SHOWN = 8;

/** Every step from a stored number to a total, in their order. */
export const CHAIN = [
  "stored value > dBZ > screens > corrections in dB > rate of each gate > mean over the cell's gates",
  "> trapezoids between scans > share of each source > steps > intervals > total",
];

/** Head of a column of numbers. */
export function right(head: string): { readonly head: string; readonly align: "right" } {
  return { head, align: "right" };
}

/** What run and time an account is of. */
export function headLines({ run, span, window, remarks }: Explanation, spanRadarMm: number | null): string[] {
  const isWhole = span.start === window.start && span.end === window.end;
  return [
    `${displayText(run.title)} (${run.status}), ${displayText(run.folder)}`,
    `window: ${instant(window.start)} to ${instant(window.end)}`,
    ...(isWhole
      ? []
      : [
          `below: ${instant(span.start)} to ${instant(span.end)}, with ${fixedDecimals(spanRadarMm, 4)} mm of the radar's depth`,
        ]),
    ...remarks.map((remark) => `note: ${remark}`),
  ];
}

/** "31.2", "31.2 to 34.0", "no" where there is none. */
export function range(values: readonly (number | null)[], digits = 1, signed = false): string {
  const known = values.filter((value) => value !== null);
  if (known.length === 0) return "no";
  const text = (value: number) => `${signed && value > 0 ? "+" : ""}${decimals(value, digits)}`;
  const [low, high] = [text(Math.min(...known)), text(Math.max(...known))];
  return low === high ? low : `${low} to ${high}`;
}

/** What the adjusted figure owes to the adjustment. */
export function adjustmentLines(adjustment: AdjustmentAccount, figureMm: number | null): string[] {
  const { applied, reason, title, factor, factorHere, gaugeCount, notes, gauges, gaugesNotListed } =
    adjustment;
  if (!applied) return [`Not adjusted: ${reason ?? ""}.`];
  const shown = gauges.slice(0, GAUGES_SHOWN);
  const hasWeight = shown.some(({ weight }) => weight !== null);
  const left = gauges.length + gaugesNotListed - shown.length;
  return [
    `Adjusted by ${title ?? ""}, from ${gaugeCount} gauges${factor === null ? "" : `: one factor, ${decimals(factor, 4)} (gauge/radar)`}; here ${decimals(factorHere ?? Number.NaN, 4)} times the radar`,
    ...notes.map((note) => `  in it: ${note}`),
    "  Gauges that move the figure most. per mm: how far it moves where the gauge reads 1 mm more.",
    textTable(
      [
        { head: "  gauge" },
        right("km"),
        right("gauge mm"),
        right("radar mm"),
        right("G/R"),
        ...(hasWeight ? [right("weight")] : []),
        right("per mm"),
        right("without it"),
      ],
      shown.map((gauge) => [
        `  ${gauge.network}/${gauge.gaugeId}`,
        fixedDecimals(gauge.distanceKm, 1),
        fixedDecimals(gauge.gaugeMm, 1),
        fixedDecimals(gauge.radarMm, 1),
        fixedDecimals(gauge.radarMm > 0 ? gauge.gaugeMm / gauge.radarMm : Number.NaN, 2),
        ...(hasWeight ? [fixedDecimals(gauge.weight, 3)] : []),
        fixedDecimals(gauge.mmPerMm, 3),
        withoutText(gauge.withoutMm, figureMm),
      ]),
    ),
    ...(left > 0 ? [`  and ${left} more gauges; --json holds the ${gauges.length} nearest`] : []),
  ];
}

function withoutText(withoutMm: number | null, figureMm: number | null): string {
  if (withoutMm === null) return "–";
  const change =
    figureMm === null
      ? ""
      : ` (${withoutMm >= figureMm ? "+" : ""}${fixedDecimals(withoutMm - figureMm, 2)})`;
  return `${fixedDecimals(withoutMm, 2)}${change}`;
}

/** "2031-05-20 12:05 UTC" of an ISO instant. */
export function instant(iso: string): string {
  return utcText(Date.parse(iso));
}

/** "12:05:18", with its date where the span holds more than one. */
export function clockOf({ span }: Explanation): (iso: string) => string {
  const day = span.start.slice(0, 10);
  const isOneDay = [span.end, new Date(Date.parse(span.end) - 1).toISOString()].some((end) =>
    end.startsWith(day),
  );
  return (iso) => (isOneDay ? iso.slice(11, 19) : iso.slice(0, 19).replace("T", " "));
}

const WIDTH = 100;

/** Breaks a line at blanks; what follows is indented a little further. */
export function wrapped(line: string): string[] {
  const indent = `${/^ */.exec(line)?.[0] ?? ""}  `;
  const lines: string[] = [];
  let rest = line;
  while (rest.length > WIDTH) {
    const cut = rest.lastIndexOf(" ", WIDTH);
    if (cut <= indent.length) break;
    lines.push(rest.slice(0, cut));
    rest = `${indent}${rest.slice(cut + 1)}`;
  }
  return [...lines, rest];
}
