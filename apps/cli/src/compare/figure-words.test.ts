import { expect, test } from "vitest";
import { figureWords } from "./figure-words.ts";

test.each([
  ["depth_mm", "depth, mm"],
  ["ratio_db", "ratio, dB"],
  ["observed_fraction", "observed fraction"],
  ["districtMm", "district, mm"],
  ["crossValidatedErrorPercent", "cross validated error, %"],
  ["before.whole.continuous[biasRatio].value", "radar: bias ratio"],
  [
    "after.table.whole.continuous[meanErrorMm].gauges.low",
    "adjusted, cross-validated: mean error mm, lower limit over gauges",
  ],
  [
    "before.whole.thresholds[1].scores[falseAlarmRatio].n",
    "radar: false alarm ratio, threshold 2, number of pairs",
  ],
])("%s is %s", (figure, words) => {
  expect(figureWords(figure)).toBe(words);
});
