import { mkdtempSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import path from "node:path";
import { InputError } from "@rainreckon/core";
import { afterAll, expect, test } from "vitest";
import { loadPlan, parsePlan } from "./load.ts";

const scratch = mkdtempSync(path.join(tmpdir(), "rainreckon-load-"));
afterAll(() => rmSync(scratch, { recursive: true }));

const LINES = [
  "title: A storm that never was", //                                   1
  "window:", //                                                         2
  "  from: 2031-05-03T12:00:00Z", //                                    3
  "  to: 2031-05-03T18:00:00Z", //                                      4
  "scans: [radar/*.h5]", //                                             5
  "radars:", //                                                         6
  "  - id: SALT", //                                                    7
  "    medianRoundMinutes: 5", //                                       8
  "    maxGapMinutes: 12.5", //                                         9
  "grid:", //                                                          10
  "  crs: +proj=laea +lat_0=52 +lon_0=3 +datum=WGS84 +units=m", //     11
  "  westM: -50000", //                                                12
  "  northM: 50000", //                                                13
  "  cellM: 1000", //                                                  14
  "  nx: 100", //                                                      15
  "  ny: 100", //                                                      16
];

/** The plan above with lines replaced or added after a line number. */
function planWith(changes: Readonly<Record<number, string>>): string {
  return LINES.map((line, index) => changes[index + 1] ?? line).join("\n");
}

function faultOf(text: string): InputError {
  try {
    parsePlan(text, "plan.yaml");
  } catch (error) {
    if (error instanceof InputError) return error;
    throw error;
  }
  throw new Error("the plan was taken, though it is wrong");
}

test("a plan without anything optional is taken, with the defaults of the schema", () => {
  const plan = parsePlan(planWith({}), "plan.yaml");
  expect(plan.radars[0]?.relation).toBe("marshall-1955-200/1.6");
  expect(plan.intervals.grids).toBe("PT1H");
});

test.each([
  // what is wrong                    line with the fault                          line  path                  what it says                 what it advises
  [
    "a misspelt key",
    { 8: "    medianRoundMinute: 5" },
    7,
    "radars[0].medianRoundMinutes",
    "is missing",
    "number",
  ],
  [
    "keys of two forms",
    { 7: "  - id: one\n    cap: { dbz: 53, mmPerHour: 100 }" },
    8,
    "radars[0].cap.mmPerHour",
    "does not go with",
    "one of the two forms",
  ],
  [
    "a word that is none of the list",
    { 1: 'title: "T"\nstatus: draft' },
    2,
    "status",
    "none of the values",
    "provisional",
  ],
  ["a title beyond all length", { 1: `title: ${"x".repeat(201)}` }, 1, "title", "too long", "200 characters"],
  ["a misspelt key on top", { 1: "titel: x" }, 1, "titel", 'no key "titel"', '"title"'],
  ["a wrong type", { 14: "  cellM: wide" }, 14, "grid.cellM", "number", "50 to 50000"],
  ["a value out of range", { 14: "  cellM: 5" }, 14, "grid.cellM", "too small", "50 to 50000"],
  ["an id that YAML reads as a number", { 7: "  - id: 007" }, 7, "radars[0].id", "string", "quotes"],
  ["from after to", { 3: "  from: 2031-05-03T19:00:00Z" }, 3, "window.from", "ends", "before"],
  ["a time without zone", { 3: "  from: 2031-05-03T12:00:00" }, 3, "window.from", "instant", "Z"],
  [
    "a zone that is none",
    { 4: `${LINES[3]}\n  zone: Europe/Saltermoor` },
    5,
    "window.zone",
    "no zone",
    "IANA",
  ],
  [
    "an unknown relation",
    { 7: "  - id: SALT\n    relation: marshal-1955-200/1.6" },
    8,
    "radars[0].relation",
    "relation",
    "marshall-1955-200/1.6",
  ],
  [
    "a step that fits no day",
    { 16: "  ny: 100\nintervals: {series: PT7M}" },
    17,
    "intervals.series",
    "divide",
    "24 hours",
  ],
  [
    "a grid step between series steps",
    { 16: "  ny: 100\nintervals: {series: PT10M, grids: PT15M}" },
    17,
    "intervals.grids",
    "whole number",
    "multiple",
  ],
  [
    "a window between steps",
    { 3: "  from: 2031-05-03T12:02:00Z", 4: "  to: 2031-05-03T18:02:00Z" },
    3,
    "window.from",
    "middle of a step",
    "whole step",
  ],
  [
    "one radar twice",
    { 10: "  - {id: SALT, medianRoundMinutes: 5, maxGapMinutes: 12.5}\ngrid:" },
    10,
    "radars[1].id",
    "twice",
    "delete",
  ],
] as const)("%s is told with its line, path and remedy", (_name, changes, line, at, what, fix) => {
  const fault = faultOf(planWith(changes as Record<number, string>));
  const all = [fault, ...((fault.cause as AggregateError | undefined)?.errors ?? [])] as InputError[];
  const told = all.find((one) => one.where === `plan.yaml, line ${line}, ${at}`);
  expect(told?.what, all.map((one) => `${one.where}: ${one.what}; ${one.fix}`).join("\n")).toContain(what);
  expect(told?.fix).toContain(fix);
  expect(fault.kind).toBe("usage");
});

test("several faults travel together, in the order of their lines", () => {
  const fault = faultOf(planWith({ 1: "titel: x", 14: "  cellM: wide" }));
  const others = (fault.cause as AggregateError).errors as InputError[];
  expect(others.at(-1)?.where).toContain("line 14");
});

test("broken YAML is told with line and column", () => {
  const fault = faultOf(planWith({ 8: "    medianRoundMinutes: [5" }));
  expect(fault.where).toMatch(/^plan\.yaml, line \d+, column \d+$/);
  expect(fault.kind).toBe("usage");
});

test("a key that stands twice is refused, not half of it forgotten", () => {
  expect(faultOf(planWith({ 9: "    maxGapMinutes: 10\n    maxGapMinutes: 20" })).where).toContain("line 10");
});

test("aliases that unfold without end are refused", () => {
  const bomb = ["a: &a [x,x,x,x,x,x,x,x,x]"];
  for (const [name, last] of ["ba", "cb", "dc", "ed", "fe", "gf", "hg", "ih"]) {
    bomb.push(`${name}: &${name} [*${last},*${last},*${last},*${last},*${last},*${last},*${last},*${last}]`);
  }
  expect(faultOf(bomb.join("\n")).what).toContain("aliases");
});

test("globs count from the plan's folder; what matches nothing is told", async () => {
  const folder = path.join(scratch, "found");
  const { mkdirSync } = await import("node:fs");
  mkdirSync(path.join(folder, "radar"), { recursive: true });
  for (const name of ["b.h5", "a.h5", "[x].h5", "note.txt"])
    writeFileSync(path.join(folder, "radar", name), "x");
  writeFileSync(
    path.join(folder, "plan.yaml"),
    planWith({ 5: 'scans: ["radar/*.h5", "radar/[x].h5", "none/*.h5"]' }),
  );
  const loaded = await loadPlan(path.join(folder, "plan.yaml"));
  expect(loaded.scanFiles.map((file) => path.relative(folder, file))).toEqual([
    "radar/[x].h5",
    "radar/a.h5",
    "radar/b.h5",
  ]);
  expect(loaded.notices.map((notice) => notice.where)).toEqual(["none/*.h5"]);
});

test("comments and the order of keys do not change the digest; a value does", async () => {
  const write = (name: string, text: string) => {
    const file = path.join(scratch, name);
    writeFileSync(file, text);
    return loadPlan(file);
  };
  const plain = await write("plain.yaml", planWith({}));
  const turned = await write("turned.yaml", [...LINES.slice(1), `# said\n${LINES[0]}`].join("\n"));
  const other = await write("other.yaml", planWith({ 9: "    maxGapMinutes: 13" }));
  expect(turned.digest).toBe(plain.digest);
  expect(other.digest).not.toBe(plain.digest);
});

test("a plan that is not there, a folder, and one beyond all length are refused", async () => {
  writeFileSync(path.join(scratch, "long.yaml"), `title: ${"x".repeat(1_000_001)}`);
  writeFileSync(path.join(scratch, "storm.yaml"), planWith({}));
  await expect(loadPlan(path.join(scratch, "strom.yaml"))).rejects.toMatchObject({
    kind: "usage",
    fix: 'did you mean "storm.yaml"?',
  });
  await expect(loadPlan(scratch)).rejects.toMatchObject({ kind: "usage" });
  await expect(loadPlan(path.join(scratch, "long.yaml"))).rejects.toMatchObject({ kind: "usage" });
});
