import { readFile } from "node:fs/promises";
import { join } from "node:path";
import fc from "fast-check";
import { expect, test } from "vitest";
import { FULL_DEVICE, scratchFolder } from "../../test/foreign-tools.ts";
import { finiteOrNull, type JsonValue, toJson, toJsonLine, writeJson } from "./json.ts";

test("keys stand in order whatever order they were set in, items stay as they were", () => {
  const text = '{\n  "a": {\n    "x": 1,\n    "y": [\n      3,\n      1\n    ]\n  },\n  "b": null\n}\n';
  expect(toJson({ b: null, a: { y: [3, 1], x: 1 } })).toBe(text);
  expect(toJson({ a: { x: 1, y: [3, 1] }, b: null })).toBe(text);
});

test("any JSON value comes back as it was (JSON.parse)", () => {
  fc.assert(
    fc.property(fc.json(), (text) => {
      const value: JsonValue = JSON.parse(text);
      // Through JSON.stringify once, which writes minus zero as 0.
      expect(JSON.parse(toJson(value))).toEqual(JSON.parse(JSON.stringify(value)));
      expect(toJsonLine(value)).not.toContain("\n");
    }),
  );
});

test("keys that mean something to JavaScript are only keys", () => {
  expect(toJson(JSON.parse('{"__proto__": 1, "constructor": 2}'))).toBe(
    '{\n  "__proto__": 1,\n  "constructor": 2\n}\n',
  );
});

test.each([
  ["NaN", { scores: [{ value: Number.NaN }] }, "$.scores[0].value is NaN"],
  ["an infinity", { ratioDb: Number.NEGATIVE_INFINITY }, "$.ratioDb is -Infinity"],
  ["a hole", { list: Array.from({ length: 1 }) }, "$.list[0] is undefined"],
  ["a date", { at: new Date(0) }, "$.at is a Date"],
  ["a map", { at: new Map() }, "$.at is a Map"],
  ["a typed array", { at: new Float32Array(1) }, "$.at is a Float32Array"],
  ["a bigint", { at: 1n }, "$.at is bigint"],
])("%s is refused, with its place", (_name, value, message) => {
  expect(() => toJson(value as unknown as JsonValue)).toThrow(message);
});

test("a value that holds itself is refused; one held twice is not", () => {
  const shared = { mm: 1 };
  expect(JSON.parse(toJson({ a: shared, b: shared }))).toEqual({ a: { mm: 1 }, b: { mm: 1 } });
  const ring: Record<string, JsonValue> = {};
  ring.self = ring;
  expect(() => toJson(ring)).toThrow("$.self holds itself");
});

test("a property that is undefined is left out", () => {
  expect(toJson({ reason: undefined, n: 0 })).toBe('{\n  "n": 0\n}\n');
});

test("an undefined score becomes null, for the caller to give the reason beside it", () => {
  expect([Number.NaN, Number.POSITIVE_INFINITY, 0.5].map(finiteOrNull)).toEqual([null, null, 0.5]);
});

test("the file holds the text; nothing is written of a value that JSON cannot hold", async () => {
  const path = join(scratchFolder(), "scores.json");
  await writeJson(path, { n: 1 });
  await expect(writeJson(path, { n: Number.NaN })).rejects.toBeInstanceOf(RangeError);
  expect(await readFile(path, "utf8")).toBe('{\n  "n": 1\n}\n');
});

test.skipIf(!FULL_DEVICE)(
  "a full disk is a failure midway (skipped where there is no /dev/full)",
  async () => {
    await expect(writeJson("/dev/full", { n: 1 })).rejects.toMatchObject({ kind: "midway" });
  },
);
