// Published and independently computed values: verification topic j (fitting Z-R relations), held against the
// functions that the command calls. Sources stand at each value.
import { rainRateMmPerHour, zMm6PerM3, zrRelation } from "@rainreckon/core";
import { checkValue, inputNumber, inputNumbers, runReferenceSuite } from "@rainreckon/test-data/published";
import { normalQuantile } from "../normal.ts";
import { logFits } from "./log-fits.ts";
import { dryThresholdDbz, matchedLaw, matchedRate, matchProbabilities } from "./probability-matching.ts";
import { biasFreeFit, biasFreeLaw, relationError } from "./sum-fits.ts";
import type { PowerLaw, ZrPairs } from "./zr-pairs.ts";

const table = checkValue("j-table").expected as { dBZ: number[]; R_mm_per_h: number[] };
const pairs: ZrPairs = {
  dbz: Float64Array.from(table.dBZ),
  rateMmPerHour: Float64Array.from(table.R_mm_per_h),
};
const once = (sample: ZrPairs) => new Float64Array(sample.dbz.length).fill(1);
const fits = logFits(pairs, once(pairs));

function comparison(law: PowerLaw) {
  const { biasRatio, rootMeanSquareErrorMmPerHour } = relationError(pairs, law);
  const sum = table.R_mm_per_h.reduce((total, rate) => total + rate, 0);
  return { sum_R_est: biasRatio * sum, bias_est_over_obs: biasRatio, rmse: rootMeanSquareErrorMmPerHour };
}

/** A sample whose logarithms are jointly normal in their first two moments: the corners of a square. */
function corners(rho: number, spreadZ: number, spreadR: number): ZrPairs {
  const [dbz, rate]: [number[], number[]] = [[], []];
  for (const u of [-1, 1]) {
    for (const v of [-1, 1]) {
      rate.push(10 ** (spreadR * u));
      dbz.push(10 * spreadZ * (rho * u + Math.sqrt(1 - rho * rho) * v));
    }
  }
  return { dbz: Float64Array.from(dbz), rateMmPerHour: Float64Array.from(rate) };
}

runReferenceSuite({
  topics: ["j-zr-fitting"],
  adapters: [
    ["j-table", () => ({ dBZ: [...pairs.dbz], R_mm_per_h: [...pairs.rateMmPerHour] })],
    [
      "j-fit-R-on-Z",
      () => {
        const { a, b } = fits.rateOnReflectivity;
        // By definition: log R = (log Z - log a) / b.
        return { a, b, beta: 1 / b, alpha: -Math.log10(a) / b };
      },
    ],
    ["j-fit-Z-on-R", () => fits.reflectivityOnRate],
    [
      "j-fit-rma",
      () => ({
        ...fits.reducedMajorAxis,
        r: fits.correlation,
        geometric_mean_of_b: Math.sqrt(fits.rateOnReflectivity.b * fits.reflectivityOnRate.b),
      }),
    ],
    [
      "j-fit-compare",
      () => ({
        R_on_Z: comparison(fits.rateOnReflectivity),
        Z_on_R: comparison(fits.reflectivityOnRate),
        rma: comparison(fits.reducedMajorAxis),
        "200_1.6": comparison({ a: 200, b: 1.6 }),
        "300_1.4": comparison({ a: 300, b: 1.4 }),
        "250_1.2": comparison({ a: 250, b: 1.2 }),
      }),
    ],
    [
      "j-biasfree-a",
      () => {
        const of = (b: number) => {
          const law = biasFreeLaw(pairs, b, once(pairs));
          return { a: law.a, check_ratio: relationError(pairs, law).biasRatio };
        };
        return { "1.2": of(1.2), "1.4": of(1.4), "1.6": of(1.6) };
      },
    ],
    [
      "j-biasfree-ab",
      () => {
        const law = biasFreeFit(pairs, once(pairs));
        return { ...law, rmse: relationError(pairs, law).rootMeanSquareErrorMmPerHour };
      },
    ],
    [
      "j-convert",
      (entry) => {
        const of = (a: number, b: number) =>
          inputNumbers(entry, "dBZ").map((dbz) => rainRateMmPerHour(dbz, zrRelation(a, b, "check value")));
        return { "200,1.6": of(200, 1.6), "300,1.4": of(300, 1.4), "250,1.2": of(250, 1.2) };
      },
    ],
    [
      "j-1db",
      (entry) =>
        inputNumbers(entry, "b").map((b) => {
          const relation = zrRelation(200, b, "check value");
          return rainRateMmPerHour(31, relation) / rainRateMmPerHour(30, relation);
        }),
    ],
    [
      "j-mfb-vs-a",
      (entry) => {
        const [factor, a, b] = ["F", "a", "b"].map((key) => inputNumber(entry, key));
        // Pairs that 200/1.6 meets once its rates are multiplied: the bias-free A takes the factor in.
        const dbz = Float64Array.of(20, 30, 40);
        const rates = dbz.map((one) => factor * rainRateMmPerHour(one, zrRelation(a, b, "check value")));
        return biasFreeLaw({ dbz, rateMmPerHour: rates }, b, new Float64Array(3).fill(1)).a;
      },
    ],
    [
      "j-jensen",
      (entry) => {
        const relation = zrRelation(200, 1.6, "check value");
        const dbz = inputNumbers(entry, "dBZ");
        const mean = (values: readonly number[]) =>
          values.reduce((sum, value) => sum + value, 0) / values.length;
        return {
          mean_R: mean(dbz.map((one) => rainRateMmPerHour(one, relation))),
          R_of_mean_Z: rainRateMmPerHour(10 * Math.log10(mean(dbz.map(zMm6PerM3))), relation),
          R_of_mean_dBZ: rainRateMmPerHour(mean(dbz), relation),
        };
      },
    ],
    [
      "j-pmm",
      (entry) => {
        const matched = matchProbabilities(
          inputNumbers(entry, "dBZ_unordered"),
          inputNumbers(entry, "rain_unordered"),
        );
        return {
          sorted_pairs: matched.map(({ dbz, rateMmPerHour }) => [dbz, rateMmPerHour]),
          R: inputNumbers(entry, "query_dBZ").map((dbz) => matchedRate(matched, dbz)),
        };
      },
    ],
    [
      "j-pmm-unequal",
      (entry) => {
        const { p } = entry.expected as { p: number[] };
        const matched = matchProbabilities(inputNumbers(entry, "dBZ"), inputNumbers(entry, "rain"), p);
        return {
          p,
          dBZ_q: matched.map(({ dbz }) => dbz),
          rain_q: matched.map(({ rateMmPerHour }) => rateMmPerHour),
        };
      },
    ],
    ["j-pmm-zero", (entry) => dryThresholdDbz(inputNumbers(entry, "dBZ"), inputNumber(entry, "share_dry"))],
    [
      "j-wpmm",
      (entry) => {
        const { p } = entry.expected as { p: number[] };
        const { radar_windows, gauge_windows } = entry.inputs as Record<string, number[][]>;
        const matched = matchProbabilities(radar_windows.flat(), gauge_windows.flat(), p);
        return {
          p,
          dBZ_q: matched.map(({ dbz }) => dbz),
          rain_q: matched.map(({ rateMmPerHour }) => rateMmPerHour),
        };
      },
    ],
    [
      "j-pmm-lognormal",
      (entry) => {
        const [mz, sz, mr, sr] = ["mz", "sz", "mr", "sr"].map((key) => inputNumber(entry, key));
        const normal = Array.from({ length: 99 }, (_, k) => normalQuantile((k + 1) / 100));
        const sample: ZrPairs = {
          // In orders that have nothing to do with each other: matching must not care.
          dbz: Float64Array.from(normal, (_, k) => 10 * (mz + sz * normal[(37 * k) % 99])),
          rateMmPerHour: Float64Array.from(normal, (z) => 10 ** (mr + sr * z)),
        };
        const { a, b } = matchedLaw(sample, 1e-6)(once(sample));
        return { a, b, log10_a: Math.log10(a) };
      },
    ],
    [
      "j-three-fits-lognormal",
      (entry) => {
        const [rho, sz, sr] = ["rho", "sz", "sr"].map((key) => inputNumber(entry, key));
        const sample = corners(rho, sz, sr);
        const three = logFits(sample, once(sample));
        return {
          R_on_Z: three.rateOnReflectivity.b,
          Z_on_R: three.reflectivityOnRate.b,
          rma: three.reducedMajorAxis.b,
        };
      },
    ],
  ],
});
