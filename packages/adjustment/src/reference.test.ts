// Verification topic e (mean-field bias): what the functions here cover; the rest comes with filters of
// the bias in time. Sources stand at each value.
import {
  type CheckValue,
  checkValue,
  inputNumbers,
  runReferenceSuite,
} from "@rainreckon/test-data/published";
import { decibels } from "@rainreckon/verification";
import { geometricMean, mean } from "simple-statistics";
import { factorFromSums } from "./mean-field-bias.ts";

const hours = checkValue("e-mfb-table").expected as readonly {
  sum_gauge_mm: number;
  sum_radar_mm: number;
}[];
const LIMITS = [0.1, 10] as const;
const hourly = hours.map(
  (hour) => factorFromSums(hour.sum_gauge_mm, hour.sum_radar_mm, LIMITS)?.factor ?? null,
);
const LATER = "not applicable until part E: filters of the bias in time";

runReferenceSuite({
  topics: ["e-mean-field-bias"],
  adapters: [
    ["e-hourly-ratio", () => hourly],
    [
      "e-total-ratio",
      () => {
        const total = (key: "sum_gauge_mm" | "sum_radar_mm") =>
          hours.reduce((sum, hour) => sum + hour[key], 0);
        const defined = hourly.filter((factor) => factor !== null);
        return {
          ratio_of_totals: factorFromSums(total("sum_gauge_mm"), total("sum_radar_mm"), LIMITS)?.factor,
          // The other two averages of the same hourly factors, by a general-purpose library.
          mean_of_ratios: mean(defined),
          geometric_mean: geometricMean(defined),
        };
      },
    ],
    [
      "e-bounds",
      // Factors from far below the lowest and far above the highest limit are clipped to it.
      (entry: CheckValue) =>
        inputNumbers(entry, "factor").map((factor) => {
          const beyond = factor === LIMITS[0] ? 0.01 : factor === LIMITS[1] ? 100 : factor;
          return decibels(factorFromSums(beyond, 1, LIMITS)?.factor ?? Number.NaN);
        }),
    ],
  ],
  notApplicable: [
    { id: "e-kalman*", reason: LATER },
    { id: "e-seo*", reason: LATER },
    { id: "e-lognormal-mean", reason: LATER },
    { id: "e-ln-log10", reason: LATER },
  ],
});
