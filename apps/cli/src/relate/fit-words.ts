import { type CapSetting, RELATIONS, resolveCap, zrRelation } from "@rainreckon/core";
import type { PairCover, RelationFit, RelationFitName } from "@rainreckon/verification";

/** The fits in a few words, for tables. */
export const FIT_TITLES: Readonly<Record<RelationFitName, string>> = {
  "rate-on-reflectivity": "log R on dBZ",
  "reflectivity-on-rate": "dBZ on log R",
  "reduced-major-axis": "reduced major axis",
  "bias-free": "bias-free",
  "fixed-b": "bias-free, b fixed",
  "probability-matching": "probability matching",
};

const OF_RAIN = RELATIONS.filter(({ phase }) => phase === "rain");
const RANGE = {
  a: { low: Math.min(...OF_RAIN.map(({ a }) => a)), high: Math.max(...OF_RAIN.map(({ a }) => a)) },
  b: { low: Math.min(...OF_RAIN.map(({ b }) => b)), high: Math.max(...OF_RAIN.map(({ b }) => b)) },
};

/** What must be said beside a fitted relation; empty where there is nothing. */
export function fitWarnings({ a, b }: RelationFit, cap: CapSetting, cover: PairCover): string[] {
  if (!(a > 0 && b > 0)) return [];
  const warnings: string[] = [];
  const outside = (name: "a" | "b", value: number, digits: number) => {
    const { low, high } = RANGE[name];
    if (value >= low && value <= high) return;
    warnings.push(
      `${name === "a" ? "A" : "b"} = ${value.toFixed(digits)} lies outside every published relation for rain, ${low} to ${high}`,
    );
  };
  outside("a", a, 0);
  outside("b", b, 2);
  // As printed: sixteen digits of A would tell nothing.
  const relation = zrRelation(Number(a.toPrecision(3)), Number(b.toPrecision(3)), "fit");
  const { dbz, mmPerHour, warning } = resolveCap(cap, relation);
  if (warning !== undefined) warnings.push(warning);
  const greatest = cover.dbz[cover.dbz.length - 1] ?? Number.NaN;
  if (greatest < dbz - 5) {
    warnings.push(
      `no pair is above ${greatest.toFixed(1)} dBZ: what it gives up to the cap, ${mmPerHour.toFixed(0)} mm/h at ${dbz.toFixed(1)} dBZ, is beyond the pairs`,
    );
  }
  return warnings;
}
