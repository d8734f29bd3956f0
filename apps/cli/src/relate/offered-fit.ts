import { type ZrRelation, zrRelation } from "@rainreckon/core";
import type { FittedRelations, RelationFit, RelationFitName } from "@rainreckon/verification";
import { counted } from "../ui/numbers.ts";
import type { RelationFitResult } from "./fit-schema.ts";
import { FIT_TITLES } from "./fit-words.ts";

/**
 * The fit for the plan, with the line that the plan takes.
 *
 * @param method - the fit asked for, whatever the pairs can tell
 * @returns null where that fit gives no relation
 */
export function offeredOf(
  fitted: FittedRelations,
  source: RelationFitResult["source"],
  method: RelationFitName | undefined,
): RelationFitResult["offered"] {
  const name = method ?? fitted.offered;
  const fit = fitted.fits.find((one) => one.name === name);
  if (fit === undefined || !(fit.a > 0 && fit.b > 0)) return null;
  const law: ZrRelation = zrRelation(rounded(fit.a), rounded(fit.b), sourceWords(fit, fitted, source));
  const why =
    method !== undefined
      ? "asked for with --method"
      : name === "bias-free"
        ? "it keeps the sum of rain with the smallest error, and the pairs tell A from b"
        : "the pairs cannot tell A from b: b is held, and A keeps the sum of rain";
  return {
    name: fit.name,
    a: law.a,
    b: law.b,
    why,
    planLine: `relation: { a: ${law.a}, b: ${law.b}, source: ${JSON.stringify(law.source)} }`,
  };
}

function sourceWords(
  fit: RelationFit,
  { cover }: FittedRelations,
  { kind, gaugeCount, intervalMinutes, start, end }: RelationFitResult["source"],
): string {
  const gauges = gaugeCount === null ? "" : ` of ${counted(gaugeCount, "gauge")}`;
  const span = kind === "pairs" || start === null || end === null ? "" : `, ${start} to ${end}`;
  const length = intervalMinutes === null ? "" : ` over ${intervalMinutes} min`;
  return `fitted to ${counted(cover.eitherCount, "pair")}${gauges}${length}${span}; ${FIT_TITLES[fit.name]}`;
}

/** Three figures: more would claim what no pairs hold. */
function rounded(value: number): number {
  return Number(value.toPrecision(3));
}
