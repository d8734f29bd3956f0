import { expect, test } from "vitest";
import {
  atLeastText,
  countText,
  errorText,
  mmText,
  percentText,
  ratioText,
  signedErrorText,
} from "./numbers.ts";

const NARROW = "\u202f";
const WIDE = "\u00a0";

// By hand, from the rules in the comments of numbers.ts.
test.each([
  [0, "0.0"],
  [0.04, `<${NARROW}0.1`],
  [0.05, "0.1"],
  [31.44, "31.4"],
  [99.94, "99.9"],
  [99.96, "100"],
  [1234.4, `1${NARROW}234`],
  [-3.26, "\u22123.3"],
])("%d mm reads %s", (mm, text) => {
  expect(mmText(mm)).toBe(text);
});

test.each([
  [0, `≥${WIDE}0.0`],
  [0.007, `>${WIDE}0`],
  [31.44, `≥${WIDE}31.4`],
])("at least %d mm reads %s", (mm, text) => {
  expect(atLeastText(mm)).toBe(text);
});

test.each([
  [0, `0${WIDE}%`],
  [0.001, `<${NARROW}1${WIDE}%`],
  [0.984, `98${WIDE}%`],
  [0.9999, `>${NARROW}99${WIDE}%`],
  [1, `100${WIDE}%`],
  [1.2, `120${WIDE}%`],
])("a share of %d reads %s: whole and none are said only where exact", (fraction, text) => {
  expect(percentText(fraction)).toBe(text);
});

test.each([
  [0.883, "0.88"],
  [0.0123, "0.012"],
  [-0.5, "\u22120.50"],
  [0, "0.00"],
])("a ratio of %d reads %s", (value, text) => {
  expect(ratioText(value)).toBe(text);
});

test("errors keep hundredths below 10 mm, and a difference carries its sign", () => {
  expect([errorText(0.123), errorText(12.34)]).toEqual(["0.12", "12.3"]);
  expect([signedErrorText(0.5), signedErrorText(-0.5), signedErrorText(0.001)]).toEqual([
    "+0.50",
    "\u22120.50",
    "0.00",
  ]);
});

test("thousands are set apart", () => {
  expect([countText(999), countText(1000), countText(1234567)]).toEqual([
    "999",
    `1${NARROW}000`,
    `1${NARROW}234${NARROW}567`,
  ]);
});
