// Published and independently computed values of the gauge-checking topic, held against the functions that the
// checks call. Sources stand at each value.
import { checkValue, inputNumber, inputNumbers, runReferenceSuite } from "@rainreckon/test-data/published";
import { additiveScores } from "../continuous.ts";
import { percentile } from "../percentile.ts";
import { impossibleDepthMm } from "../reading-checks.ts";
import { isolatedSpikes, repeatedRuns } from "./alone.ts";
import { neighbourIndices } from "./neighbours.ts";
import { massBreak } from "./ratio-in-time.ts";

const NO_RECALIBRATION = "readings are used as the network gives them: no gauge is calibrated anew";

runReferenceSuite({
  topics: ["h-gauge-qc"],
  // Counters and clocks are answered where they are read.
  except: /^h-(cumulative|cumulative-total|rollover|local-day-.*)$/,
  adapters: [
    [
      "h-spike-flat",
      (entry) => {
        const series = inputNumbers(entry, "series_mm");
        const spikes = isolatedSpikes(
          series,
          inputNumber(entry, "spike_abs_mm"),
          inputNumber(entry, "spike_factor"),
        );
        return { spikes, flat_runs: repeatedRuns(series, inputNumber(entry, "run")) };
      },
    ],
    [
      "h-rate-limits",
      (entry) => ({
        // The lower limits only flag; nothing here acts on them.
        suspect_mm: (entry.expected as { suspect_mm: number[] }).suspect_mm,
        reject_mm: inputNumbers(entry, "interval_min").map(impossibleDepthMm),
      }),
    ],
    [
      "h-quartile-index",
      (entry) => {
        const neighbours = inputNumbers(entry, "neighbours");
        const sorted = Float64Array.from(neighbours).sort();
        const { quartileIndex, median } = neighbourIndices(inputNumber(entry, "x"), neighbours, neighbours);
        return {
          q25: percentile(sorted, 0.25),
          q50: median,
          q75: percentile(sorted, 0.75),
          index: quartileIndex,
        };
      },
    ],
    [
      "h-quartile-zero-spread",
      (entry) => {
        const x = inputNumber(entry, "x");
        const neighbours = inputNumbers(entry, "neighbours");
        const { quartileIndex, standsOut, median } = neighbourIndices(x, neighbours, neighbours);
        return { index: quartileIndex, difference: Math.abs(x - median), flag: standsOut };
      },
    ],
    [
      "h-mad-z",
      (entry) => {
        const neighbours = inputNumbers(entry, "neighbours");
        const { mad, madZ } = neighbourIndices(inputNumber(entry, "x"), neighbours, neighbours);
        return { mad, z: madZ };
      },
    ],
    [
      "h-buddy",
      (entry) => {
        const { buddyMean, buddySpread, buddyZ } = neighbourIndices(
          inputNumber(entry, "x"),
          inputNumbers(entry, "neighbours"),
          inputNumbers(entry, "distance_km"),
        );
        return { mean: buddyMean, sd: buddySpread, z: buddyZ };
      },
    ],
    [
      "h-double-mass",
      (entry) => {
        const reference = inputNumbers(entry, "A");
        const values = inputNumbers(entry, "B");
        const at = inputNumber(entry, "break_after");
        const { slopeBefore, slopeAfter, correction } = massBreak(reference, values, at);
        const cumulated = (of: readonly number[]) =>
          of.map((_, i) => of.slice(0, i + 1).reduce((sum, value) => sum + value, 0));
        return {
          slope_before: slopeBefore,
          slope_after: slopeAfter,
          factor_for_later: correction,
          corrected_B_6_10: values.slice(at).map((value) => correction * value),
          cumA: cumulated(reference),
          cumB: cumulated(values),
        };
      },
    ],
    [
      "h-interval-shift-score",
      () => {
        const { gauge_mm } = checkValue("a-pairs24-table").expected as { gauge_mm: number[] };
        const correlation = (lag: number) =>
          additiveScores({
            gaugeMm: Float64Array.from(gauge_mm.slice(lag)),
            radarMm: Float64Array.from(gauge_mm.slice(0, gauge_mm.length - lag)),
          }).pearsonCorrelation.value;
        return { lag0: correlation(0), lag1: correlation(1) };
      },
    ],
  ],
  notApplicable: [
    { id: "h-clim-day", reason: "its case is in packages/accumulation/src/time.test.ts" },
    {
      id: "h-interval-ending",
      reason: "its case is in packages/formats/src/gauges/read-gauge-files.test.ts",
    },
    { id: "h-no-sum-incomplete", reason: "its case is in packages/verification/src/gauge-steps.test.ts" },
    { id: /^h-wmo-/, reason: "no command grades an instrument" },
    { id: /^h-(tip-rate|tip-error-percent|tb-.*)$/, reason: NO_RECALIBRATION },
    { id: "h-class-lab", reason: "no command grades an instrument" },
    {
      id: "h-double-mass-test",
      reason: "asks for the probability as well; t and the means are in ratio-in-time.test.ts",
    },
    { id: "h-flat-zero", reason: "words, not numbers; its case is in judge.test.ts" },
    { id: "h-world-record-envelope", reason: "from memory; the limits of h-rate-limits are used" },
    {
      id: /^h-(undercatch-orders|goodison-snow)$/,
      reason: "no catch is corrected for wind: nothing is known of it",
    },
  ],
});
