import { expect, test } from "vitest";
import { findZone } from "./zone.ts";

// Offsets in July 2031 by IANA's rules, in minutes.
test.each([
  ["UTC", 0],
  ["UTC+01:00", 60],
  ["UTC-3:30", -210],
  ["Europe/Oslo", 120],
  ["Asia/Kolkata", 330],
  ["America/St_Johns", -150],
] as const)("%s stands %d min from UTC in July", (name, minutes) => {
  expect(findZone(name)?.offset(Date.UTC(2031, 6, 1))).toBe(minutes);
});

test.each(["Europe/Saltermoor", "UTC+25:00", "local", "", "+01:00"])("there is no zone %j", (name) => {
  expect(findZone(name)).toBeUndefined();
});
