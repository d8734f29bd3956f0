import { expect, test } from "vitest";
import { allCheckValues, type CheckValue, checkValues, isBinding } from "./entries.ts";
import { fits, sortEntries } from "./suite.ts";
import { differences, withinTolerance } from "./tolerance.ts";

const entry = (expected: CheckValue["expected"], type: "absolute" | "relative" | "exact", value: number) => ({
  ...(allCheckValues()[0] as CheckValue),
  expected,
  tolerance: { type, value },
});

// Counts as both collections state them about themselves.
test.each([
  ["radar-physics", 1479],
  ["verification-and-merging", 399],
] as const)("%s holds %d values", (book, count) => {
  expect(allCheckValues().filter((value) => value.book === book)).toHaveLength(count);
});

test("ids and topics are unique over both books", () => {
  const ids = allCheckValues().map(({ id }) => id);
  expect(new Set(ids).size).toBe(ids.length);
  const booksOfTopic = new Map<string, Set<string>>();
  for (const { topic, book } of allCheckValues()) {
    booksOfTopic.set(topic, (booksOfTopic.get(topic) ?? new Set()).add(book));
  }
  expect([...booksOfTopic.values()].every((books) => books.size === 1)).toBe(true);
});

test("customs and recollections bind no function", () => {
  const free = new Set(
    allCheckValues()
      .filter((value) => !isBinding(value))
      .map(({ kind }) => kind),
  );
  expect([...free].sort()).toEqual([
    "common practice",
    "from memory",
    "house rule (proposed here)",
    "input table (invented for this book)",
  ]);
});

test("a topic that does not exist is refused", () => {
  expect(() => checkValues("z-nothing")).toThrow(RangeError);
});

test.each([
  ["absolute, at the edge", 2, "absolute", 0.5, 2.5, true],
  ["absolute, past it", 2, "absolute", 0.5, 2.51, false],
  ["relative, at the edge", -200, "relative", 0.01, -202, true],
  ["relative, past it", -200, "relative", 0.01, -202.1, false],
  ["exact", 1.6, "exact", 0, 1.6, true],
  ["exact, one step off", 1.6, "exact", 0, 1.6000000000000003, false],
  ["NaN is never a number", 2, "absolute", 1e9, Number.NaN, false],
  ["a text is not a number", 2, "absolute", 0.5, "2", false],
  ["null is met by NaN", null, "absolute", 0, Number.NaN, true],
  ["null is met by undefined", null, "absolute", 0, undefined, true],
  ["null is not met by 0", null, "absolute", 0, 0, false],
  ["Infinity", "Infinity", "absolute", 0, Number.POSITIVE_INFINITY, true],
  ["a large number is not Infinity", "Infinity", "absolute", 0, 1e300, false],
  ["true", true, "exact", 0, true, true],
  ["false is not true", true, "exact", 0, false, false],
] as const)("tolerance: %s", (_title, expected, type, value, actual, holds) => {
  expect(withinTolerance(entry(expected, type, value), actual)).toBe(holds);
});

test("nested values are compared leaf by leaf, and the leaf is named", () => {
  const nested = entry({ a: [1, { b: null, c: 3 }] }, "absolute", 0.1);
  expect(differences(nested, { a: [1.05, { b: Number.NaN, c: 3.05, more: 1 }] })).toEqual([]);
  expect(differences(nested, { a: new Float64Array([1]) })).toEqual(["a: expected 2 items, got 1"]);
  expect(differences(nested, { a: [2, { b: 0, c: 3 }] })).toEqual([
    "a[0]: expected 1 within 0.1 absolute, got 2",
    "a[1].b: expected undefined, got 0",
  ]);
  expect(differences(nested, 4)).toEqual(["value: expected parts, got 4"]);
});

test("patterns: an id, a run of characters, a regular expression", () => {
  expect(fits("cap-300-1.4-49", "cap-300-1.4-49")).toBe(true);
  expect(fits("cap-300-1.4-49", "cap-300-124-49")).toBe(false);
  expect(fits("cap-*-49", "cap-300-1.4-49")).toBe(true);
  expect(fits("cap-*", "snow-cap-1")).toBe(false);
  expect(fits(/^vip-/, "vip-dvip-L1-low")).toBe(true);
});

test("a suite finds entries that nothing answers, double answers, and patterns that fit nothing", () => {
  const answer = () => 0;
  const { sorted, faults } = sortEntries({
    topics: ["c-zr-relations"],
    except: "zr-*",
    adapters: [
      ["cap-300-*", answer],
      ["cap-*-49", answer],
      ["no-such-*", answer],
    ],
    notApplicable: [
      { id: "cap-300-1.4-49", reason: "said twice" },
      { id: /^nor-such/, reason: "said of nothing" },
      { id: "vip-*", reason: "not ours" },
    ],
  });
  expect(faults).toEqual([
    "cap-300-1.4-49 is answered and excused",
    "adapter no-such-* fits nothing",
    "reason for /^nor-such/ fits nothing",
  ]);
  const open = sorted.filter(({ adapter, reason }) => adapter === undefined && reason === undefined);
  expect(open.map(({ entry }) => entry.id)).toContain("cap-250-1.2-51");
  expect(open.map(({ entry }) => entry.id)).not.toContain("cap-250-1.2-49");
  expect(sorted.some(({ entry }) => entry.id.startsWith("zr-"))).toBe(false);
  expect(sorted.find(({ entry }) => entry.id === "vip-glossary-L1-low")?.reason).toBe("not ours");
});
