import { expect, test } from "vitest";
import { odimEpochMs } from "./times.ts";

// Epoch seconds: `date -u -d '2023-04-20 06:50:00' +%s` prints 1681973400, and so on (GNU coreutils).
test.each([
  ["20230420", "065000", 1_681_973_400_000],
  ["20230420", "065000.25", 1_681_973_400_250],
  ["20240229", "235959", 1_709_251_199_000],
  ["19700101", "000000", 0],
  ["20161231", "235960", 1_483_228_800_000],
] as const)("%s %s is %d ms", (date, time, expected) => {
  expect(odimEpochMs(date, time)).toBe(expected);
});

test.each([
  ["19491231", "235959"],
  ["20230229", "000000"],
  ["20230001", "000000"],
  ["20231301", "000000"],
  ["20230420", "240000"],
  ["20230420", "066000"],
  ["2023-04-20", "06:50"],
  ["", ""],
] as const)("%s %s is no instant", (date, time) => {
  expect(odimEpochMs(date, time)).toBeUndefined();
});
