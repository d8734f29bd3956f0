import { InputError } from "@rainreckon/core";
import { expect, test } from "vitest";
import { errorText, exitStatusOf } from "./exit.ts";

const system = (code: string) =>
  Object.assign(new Error(`${code}: it failed`), { code, path: "out/totals.nc" });

test.each([
  ["a plan with a fault", new InputError("w", "x", "f", { kind: "usage" }), 2],
  ["nothing usable", new InputError("w", "x", "f", { kind: "no-input" }), 3],
  ["the one input is bad", new InputError("w", "x", "f"), 3],
  ["failed midway", new InputError("w", "x", "f", { kind: "midway" }), 1],
  ["disk full", system("ENOSPC"), 1],
  ["no right to write", system("EACCES"), 2],
  ["read-only disk", system("EROFS"), 2],
  ["a fault of ours", new TypeError("x is undefined"), 1],
  ["something thrown that is no error", "text", 1],
] as const)("%s ends with its status", (_what, error, status) => {
  expect(exitStatusOf(error)).toBe(status);
});

test("a disk that is full is named with the file, and what to do about it", () => {
  expect(errorText(system("ENOSPC"), false)).toBe(
    "error: the disk is full\n  where: out/totals.nc\n  fix:   make room and run the same command again: it goes on where it stopped",
  );
});

test("text from files comes out harmless", () => {
  const hostile = "\u001b]0;gone\u0007 name\u202e";
  expect(errorText(new InputError(hostile, hostile, hostile), false)).not.toMatch(
    /[\u0000-\u0009\u000b-\u001f\u007f\u202e]/,
  );
});

test("of many faults twenty are told and the rest is counted", () => {
  const fault = (index: number) =>
    new InputError(`fault ${index}`, "plan.yaml", "mend it", { kind: "usage" });
  const others = Array.from({ length: 30 }, (_, index) => fault(index + 1));
  const text = errorText(
    new InputError("fault 0", "plan.yaml", "mend it", { cause: new AggregateError(others) }),
    false,
  );
  expect(text.match(/^error: /gm)).toHaveLength(20);
  expect(text).toMatch(/\nand 11 more faults$/);
});
