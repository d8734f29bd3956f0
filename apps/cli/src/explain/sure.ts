import type { DepthRange } from "@rainreckon/adjustment";
import { fixedDecimals } from "../ui/numbers.ts";
import type { PointAccount } from "./schema.ts";

type Sure = PointAccount["end"]["sure"];

/** How sure a figure is, as an account tells it; null where nothing does. */
export function sureOf(range: DepthRange | undefined): Sure {
  if (range === undefined || Number.isNaN(range.p10Mm)) return null;
  const { standardErrorMm, p10Mm, p90Mm } = range;
  return { standardErrorMm, p10Mm, p90Mm };
}

/** The same for people; nothing where nothing tells. */
export function sureLines(sure: Sure): string[] {
  if (sure === null) return [];
  const mm = (value: number) => fixedDecimals(value, 2);
  return [
    `  standard error ${mm(sure.standardErrorMm)} mm; 8 in 10 chances that the truth lies between ${mm(sure.p10Mm)} and ${mm(sure.p90Mm)} mm`,
  ];
}
