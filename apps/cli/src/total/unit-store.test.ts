import { mkdtempSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import path from "node:path";
import { afterAll, expect, test } from "vitest";
import type { UnitJob, UnitResult } from "./job.ts";
import { unitStore } from "./unit-store.ts";

const folder = mkdtempSync(path.join(tmpdir(), "rainreckon-units-"));
afterAll(() => rmSync(folder, { recursive: true }));

const job: UnitJob = { number: 7, intervals: [], steps: [] };
const result = { gauges: { depthMm: [Float64Array.of(1.5, Number.NaN)] } } as unknown as UnitResult;

test("gives back what was saved, to the bit, and knows what is not there", () => {
  const store = unitStore(folder);
  expect(store.has(job)).toBe(false);
  store.save(job, result);
  expect(store.has(job)).toBe(true);
  expect(store.load(job)).toEqual(result);
});

test("a result that was cut short or changed is as good as none", () => {
  const store = unitStore(folder);
  store.save(job, result);
  const file = path.join(folder, "unit-00007");
  const whole = readFileSync(file);
  writeFileSync(file, whole.subarray(0, whole.length - 1));
  expect(store.has(job)).toBe(false);
  const changed = Buffer.from(whole);
  changed[whole.length - 3]! ^= 1;
  writeFileSync(file, changed);
  expect(store.has(job)).toBe(false);
  expect(() => store.load(job)).toThrow("result of unit 7 is gone or damaged");
});
