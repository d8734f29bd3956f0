import { gaugeKey } from "@rainreckon/core";
import { displayText } from "@rainreckon/formats";
import { sumAdjusted } from "./adjust.ts";
import { compareWithGauges } from "./against-gauges.ts";
import type { AssembledRun } from "./assemble.ts";
import type { RunCaution } from "./cautions.ts";
import { bestMm, districtFigure } from "./figures.ts";
import type { PreparedRun } from "./prepare.ts";
import type { UnitStore } from "./unit-store.ts";

/** What a person's decision about a gauge does to the headline. */
export interface OverrideEffect {
  readonly network: string;
  readonly gauge: string;
  readonly verdict: "use" | "leave-out";
  readonly reason: string;
  readonly by: string;
  readonly date: string;
  /** Depth of the district with all overrides of the plan, and with all but this one; mm, NaN where not known. */
  readonly districtMm: number;
  readonly withoutMm: number;
}

/**
 * The headline without each override of the plan: gauges are judged, and the total adjusted, as if it were not there.
 *
 * @param districtMm - the headline with all of them
 * @returns in the order of the plan; those that name no gauge of the run are absent
 */
export function overrideEffects(
  run: PreparedRun,
  total: AssembledRun,
  store: UnitStore,
  districtMm: number,
): OverrideEffect[] {
  const { plan } = run.loaded;
  const known = new Set(run.gauges.gauges.map(({ series }) => gaugeKey(series)));
  return plan.overrides
    .filter(({ network, gauge }) => known.has(gaugeKey({ network, id: gauge })))
    .map((override) => {
      const overrides = plan.overrides.filter((other) => other !== override);
      const changed = { ...run, loaded: { ...run.loaded, plan: { ...plan, overrides } } };
      const comparison = compareWithGauges(changed, total);
      const adjustedTotalMm = comparison.adjustment.applied
        ? sumAdjusted(changed, total, comparison.adjustment, store)
        : undefined;
      const withoutMm = bestMm(districtFigure({ run: changed, total, comparison, adjustedTotalMm }));
      return { ...override, districtMm, withoutMm };
    });
}

/** Every override with its reason and what it does, in words that stand alone. */
export function overrideCautions(effects: readonly OverrideEffect[]): RunCaution[] {
  const depth = (mm: number) => (Number.isNaN(mm) ? "not known" : `${mm.toFixed(2)} mm`);
  return effects.map(({ network, gauge, verdict, reason, by, date, districtMm, withoutMm }) => ({
    kind: "other",
    text: `Gauge ${displayText(gauge, 60)} of network ${displayText(network, 60)} is ${verdict === "use" ? "used" : "left out"} by override (${displayText(by, 60)}, ${date}: ${displayText(reason, 200)}): with it the district has ${depth(districtMm)}, without it ${depth(withoutMm)}.`,
  }));
}
