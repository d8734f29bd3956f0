import { appendFileSync, existsSync, readdirSync, readFileSync } from "node:fs";
import path from "node:path";
import { beforeAll, describe, expect, test } from "vitest";
import { memberBytes, refuseMembersBeyondDisk } from "../src/total/members.ts";
import type { PreparedRun } from "../src/total/prepare.ts";
import { planText, SOUND_AREA, SOUND_GAUGES, writeAreas, writeGauges, writeScans } from "./even-rain.ts";
import { type CliResult, ensureBuilt } from "./run-cli.ts";
import { csvRows, manifestOf, readNetCdf, scratchFolder, total, writeIn } from "./total-kit.ts";

const folder = scratchFolder("uncertainty");
let plan: string;

beforeAll(async () => {
  ensureBuilt();
  await writeScans(folder);
  // Gauges that differ among themselves by up to a tenth.
  writeGauges(
    folder,
    SOUND_GAUGES.map((gauge, k) => ({ ...gauge, times: 1.1 + 0.02 * k })),
  );
  writeAreas(folder, [SOUND_AREA]);
  plan = writeIn(folder, "plan.yaml", planText({ adjustment: "{ method: mean-field-bias }" }));
});

describe("a run with members", () => {
  const run = path.join(folder, "run");
  let result: CliResult;

  beforeAll(() => {
    result = total(plan, "run", ["--members", "3"]);
    expect(result.status, result.stderr).toBe(0);
  });

  test("says what they will take, and p10 to p90 beside its figures", () => {
    expect(result.stderr).toMatch(/3 members will take up to 1 MB/);
    expect(result.stdout).toMatch(/mm \(p10–p90 \d+\.\d+–\d+\.\d+\) over all catchments together/);
  });

  test("bounds the depth of the catchment, wider for its size in a step", () => {
    const rows = csvRows(path.join(run, "catchments.csv"));
    const share = (row: Readonly<Record<string, string>> | undefined) => {
      const [depth, p10, p90] = [row?.depth_mm, row?.p10_mm, row?.p90_mm].map(Number);
      expect(p10).toBeLessThan(depth);
      expect(p90).toBeGreaterThan(depth);
      return (p90 - p10) / depth;
    };
    expect(rows.length).toBe(13);
    expect(share(rows[5])).toBeGreaterThan(share(rows[0]));
  });

  test("gives each cell with an adjusted depth a standard error, and no other", async () => {
    const held = await readNetCdf(path.join(run, "totals.nc"));
    const depth = held.get("adjusted_total")?.values ?? new Float32Array();
    const error = held.get("adjusted_total_standard_error")?.values ?? new Float32Array();
    expect(error.length).toBe(80 * 80);
    for (const [cell, mm] of depth.entries()) expect(error[cell] > 0).toBe(!Number.isNaN(mm));
    expect(error.filter((mm) => mm > 0).length).toBeGreaterThan(1000);
  });

  test("writes members that differ, about the adjusted depth, and lists them", async () => {
    const files = readdirSync(path.join(run, "members")).sort();
    expect(files).toEqual(["member_001.nc", "member_002.nc", "member_003.nc"]);
    const listed = manifestOf(run).outputs.map(({ file }) => file);
    for (const file of files) expect(listed).toContain(`members/${file}`);
    const adjusted = (await readNetCdf(path.join(run, "totals.nc"))).get("adjusted_depth")?.values;
    const members = await Promise.all(
      files.map(
        async (file) => (await readNetCdf(path.join(run, "members", file))).get("member_depth")?.values,
      ),
    );
    expect(members[0]).not.toEqual(members[1]);
    const wet = [...(adjusted ?? [])].findIndex((mm) => mm > 0);
    for (const member of members) {
      const ratio = (member?.[wet] ?? 0) / (adjusted?.[wet] ?? 0);
      expect(ratio).toBeGreaterThan(0.3);
      expect(ratio).toBeLessThan(3);
      for (const [cell, mm] of (adjusted ?? []).entries()) {
        expect(Number.isNaN(member?.[cell])).toBe(Number.isNaN(mm));
      }
    }
  });

  test("gives their depth by catchment and interval", () => {
    const rows = csvRows(path.join(run, "members_catchments.csv"));
    expect(rows.map(({ member, catchment_id: id }) => `${member} ${id}`)).toEqual(["1 A", "2 A", "3 A"]);
    expect(new Set(rows.map((row) => row.depth_mm)).size).toBe(3);
  });

  test("another run has the same bytes, and the first member of two is the first of three", () => {
    expect(total(plan, "again", ["--members", "2", "--quiet"]).status).toBe(0);
    const again = path.join(folder, "again");
    for (const file of ["members/member_001.nc", "members/member_002.nc", "totals.nc", "catchments.csv"]) {
      expect(readFileSync(path.join(again, file)).equals(readFileSync(path.join(run, file))), file).toBe(
        true,
      );
    }
  });

  test("is there already for as many members, and none; another number is refused", () => {
    for (const members of ["3", "0"]) {
      const same = total(plan, "run", ["--members", members]);
      expect(same.status, same.stderr).toBe(0);
      expect(same.stdout).toMatch(/finished and unchanged/);
    }
    const more = total(plan, "run", ["--members", "4"]);
    expect(more.status).toBe(2);
    expect(more.stderr).toMatch(/has 3 members/);
  });

  test("is refused once a member was changed", () => {
    appendFileSync(path.join(folder, "again/members/member_002.nc"), "x");
    const changed = total(plan, "again", ["--members", "2"]);
    expect(changed.status).toBe(2);
    expect(changed.stderr).toMatch(/members\/member_002\.nc was changed/);
  });
});

test("a dry run says what members would take", () => {
  const dry = total(plan, "dry", ["--members", "500", "--dry-run"]);
  expect(dry.status, dry.stderr).toBe(0);
  // 500 members of 6,400 cells: 4 bytes for the one hour, 16 for the place, and 50,000 for the rest.
  expect(dry.stdout).toMatch(/members: up to 89 MB of disk/);
  expect(existsSync(path.join(folder, "dry"))).toBe(false);
});

test("without gauges nothing tells of errors: bounds are empty, members are left out with a reason", async () => {
  const alone = writeIn(folder, "alone.yaml", planText({ gauges: "" }));
  const result = total(alone, "alone", ["--members", "2"]);
  expect(result.status, result.stderr).toBe(0);
  expect(result.stderr).toMatch(/no gauges that were held out tell of errors/);
  const run = path.join(folder, "alone");
  expect(
    csvRows(path.join(run, "catchments.csv")).every((row) => row.p10_mm === "" && row.p90_mm === ""),
  ).toBe(true);
  expect(existsSync(path.join(run, "members"))).toBe(false);
  expect(readFileSync(path.join(run, "README.txt"), "utf8")).toMatch(/p10_mm and p90_mm are empty/);
  expect(total(alone, "alone", ["--members", "2"]).stdout).toMatch(/finished and unchanged/);
});

test("members beyond the free disk are refused, with what they take and what is free", () => {
  const grid = { nx: 100_000, ny: 100_000 };
  const huge = { grid, intervals: new Array(24) } as unknown as PreparedRun;
  expect(memberBytes(huge, 1)).toBe(1e10 * (24 * 4 + 16) + 50_000);
  expect(() => refuseMembersBeyondDisk(huge, 1000, folder)).toThrow(/1000 members take up to .* MB are free/);
  expect(() =>
    refuseMembersBeyondDisk({ ...huge, grid: { nx: 2, ny: 2 } } as PreparedRun, 1, folder),
  ).not.toThrow();
});
