import { readFileSync } from "node:fs";
import path from "node:path";
import { generateStorm, TINY } from "@rainreckon/test-data/storm";
import { beforeAll, expect, test } from "vitest";
import { ensureBuilt } from "./run-cli.ts";
import { csvRows, planFor, scratchFolder, total } from "./total-kit.ts";

const scratch = scratchFolder("overrides");
const storm = path.join(scratch, "storm");

interface Headline {
  readonly districtMm: number;
  readonly overrides: readonly Readonly<Record<string, string | number>>[];
}

function headlineOf(run: string): Headline {
  const manifest = JSON.parse(readFileSync(path.join(storm, run, "manifest.json"), "utf8")) as {
    readonly headline: Headline;
  };
  return manifest.headline;
}

function runWith(overrides: readonly object[], out: string): void {
  const plan = planFor(
    storm,
    (document) => {
      document.set("overrides", overrides);
      document.setIn(["adjustment", "minGaugeSumMm"], 10);
      document.setIn(["adjustment", "method"], "mean-field-bias");
    },
    `${out}.yaml`,
  );
  const { status, stderr } = total(plan, out, ["--workers", "1"]);
  if (status !== 0) throw new Error(`total ended with ${status}: ${stderr}`);
}

const BY = { by: "A. Nobody", date: "2031-05-21" };
const KEEP_OUT = { network: "moor", gauge: "M08", verdict: "leave-out", reason: "under a tree", ...BY };

beforeAll(async () => {
  ensureBuilt();
  await generateStorm({ ...TINY, folder: storm });
  runWith([], "none");
  runWith([KEEP_OUT, { ...KEEP_OUT, gauge: "nobody" }], "one");
});

test("a run tells each override, who decided it, and the headline with and without it", () => {
  const none = headlineOf("none");
  const one = headlineOf("one");
  expect(none.overrides).toEqual([]);
  expect(one.overrides).toHaveLength(1);
  expect(one.overrides[0]).toMatchObject({ ...KEEP_OUT, districtMm: one.districtMm });
  // Without its only override a run is the run of the plan without overrides.
  expect(one.overrides[0]?.withoutMm).toBe(none.districtMm);
  expect(one.districtMm).not.toBe(none.districtMm);
});

test("the gauge shapes nothing, and gauges.csv and the README say why", () => {
  const row = csvRows(path.join(storm, "one", "gauges.csv")).find(({ gauge_id }) => gauge_id === "M08");
  expect(row?.evidence).toContain("Left out by override: under a tree (A. Nobody, 2031-05-21).");
  const pairs = csvRows(path.join(storm, "one", "pairs.csv")).filter(({ gauge_id }) => gauge_id === "M08");
  expect(new Set(pairs.map(({ used }) => used))).toEqual(new Set(["no"]));
  expect(readFileSync(path.join(storm, "one", "README.txt"), "utf8")).toMatch(
    /Gauge M08 of network moor is left out by override \(A\. Nobody, 2031-05-21: under a tree\): with it the district has \d/,
  );
});
