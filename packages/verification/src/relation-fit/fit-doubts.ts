import type { RelationFit, RelationFitName } from "./fit-relations.ts";

/** Why the pairs cannot tell A from b. */
export interface Doubt {
  readonly kind: "spread of rates" | "width of b" | "no exponent" | "scatter" | "no intervals";
  /** One sentence with numbers. */
  readonly words: string;
}

/**
 * Above it, columns of a regression begin to stand in for each other: Belsley, Kuh and Welsch (1980), Regression
 * Diagnostics, Wiley (from memory).
 */
const MOST_CONDITION = 10;
/** As far apart as tropical (1.2) and widespread rain (1.6) are in the catalogue. House rule. */
const MOST_WIDTH_OF_B = 0.4;

/**
 * What keeps the pairs from telling A from b; empty where they can.
 *
 * House rules: the design of the regression is ill-conditioned; the interval of the bias-free b is as wide as the
 * catalogue; the regressions both ways are as far apart; or there is no bias-free b at all.
 */
export function doubtsOf(fits: readonly RelationFit[], conditionIndex: number): Doubt[] {
  const fit = (name: RelationFitName) => fits.find((one) => one.name === name) as RelationFit;
  const doubts: Doubt[] = [];
  const biasFree = fit("bias-free");
  if (!(conditionIndex <= MOST_CONDITION)) {
    doubts.push({
      kind: "spread of rates",
      words: `the rates are too much alike: condition index ${digits(conditionIndex)}, ${MOST_CONDITION} is the most`,
    });
  }
  if (Number.isNaN(biasFree.b)) doubts.push({ kind: "no exponent", words: biasFree.reason });
  const { low, high, level, reason } = biasFree.bInterval;
  if (Number.isNaN(high)) {
    doubts.push({ kind: "no intervals", words: `b has no interval: ${reason ?? "not known"}` });
  } else if (high - low > MOST_WIDTH_OF_B) {
    doubts.push({
      kind: "width of b",
      words:
        `b lies between ${low.toFixed(2)} and ${high.toFixed(2)} (${Math.round(100 * level)} %), ` +
        `as wide as the whole catalogue (${MOST_WIDTH_OF_B} is the most)`,
    });
  }
  const [flat, steep] = [fit("reflectivity-on-rate").b, fit("rate-on-reflectivity").b];
  if (steep - flat > MOST_WIDTH_OF_B) {
    doubts.push({
      kind: "scatter",
      words:
        `the regressions both ways give b = ${flat.toFixed(2)} and ${steep.toFixed(2)}: ` +
        "scatter, not rain, decides which it is",
    });
  }
  return doubts;
}

function digits(value: number): string {
  return Number.isFinite(value) ? value.toFixed(1) : "without limit";
}
