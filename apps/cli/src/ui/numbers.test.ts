import { expect, test } from "vitest";
import {
  counted,
  decimals,
  depthText,
  isoUtc,
  lengthText,
  localText,
  placeText,
  utcText,
} from "./numbers.ts";

// By hand, but for the clocks: IANA has Europe/Oslo at UTC+2 in May 2031 and at UTC+1 in January,
// and Asia/Kathmandu at UTC+5:45 all year.
test.each([
  [counted(1, "file"), "1 file"],
  [counted(10000, "file"), "10,000 files"],
  [counted(1234567, "gate"), "1,234,567 gates"],
  [decimals(1.23456, 2), "1.23"],
  [decimals(2, 2), "2"],
  [decimals(-0.0001, 2), "0"],
  [depthText(0), "0.0"],
  [depthText(0.0068), "0.007"],
  [depthText(0.00001), "< 0.001"],
  [depthText(21.14), "21.1"],
  [depthText(Number.NaN), "–"],
  [depthText(null), "–"],
  [decimals(Number.NaN, 2), "–"],
  [placeText(4.1, 51.2), "51.2000° N, 4.1000° E"],
  [placeText(-70.25, -33.5), "33.5000° S, 70.2500° W"],
  [isoUtc(Date.UTC(2031, 4, 3, 12)), "2031-05-03T12:00:00Z"],
  [utcText(Date.UTC(2031, 4, 3, 12)), "2031-05-03 12:00 UTC"],
  [utcText(Date.UTC(2031, 4, 3, 12, 0, 6)), "2031-05-03 12:00:06 UTC"],
  [localText(Date.UTC(2031, 4, 3, 12), "Europe/Oslo"), "2031-05-03 14:00 UTC+2"],
  [localText(Date.UTC(2031, 0, 3, 12), "Europe/Oslo"), "2031-01-03 13:00 UTC+1"],
  [localText(Date.UTC(2031, 0, 3, 12), "Asia/Kathmandu"), "2031-01-03 17:45 UTC+5:45"],
  [lengthText(45_000), "45 s"],
  [lengthText(300_000), "5 min"],
  [lengthText(300_500), "5 min 1 s"],
  [lengthText(5_400_000), "1 h 30 min"],
  [lengthText(86_400_000), "24 h"],
  [lengthText(7_199_000), "2 h"],
])("%s is written %s", (written, wanted) => {
  expect(written).toBe(wanted);
});
