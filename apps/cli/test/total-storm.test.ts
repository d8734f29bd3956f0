import { spawn } from "node:child_process";
import { cpSync, existsSync, mkdirSync, readdirSync, readFileSync } from "node:fs";
import path from "node:path";
import { setTimeout as sleep } from "node:timers/promises";
import { generateStorm, SMALL } from "@rainreckon/test-data/storm";
import { beforeAll, describe, expect, test } from "vitest";
import { ensureBuilt, MAIN } from "./run-cli.ts";
import {
  arrayOf,
  csvRows,
  editPlan,
  fingerprints,
  manifestOf,
  planFor,
  type ReadArray,
  readNetCdf,
  scratchFolder,
  total,
  touchedAt,
} from "./total-kit.ts";

const scratch = scratchFolder("storm");
const storm = path.join(scratch, "storm");
const run = path.join(storm, "run");
let plan: string;
let arrays: ReadonlyMap<string, ReadArray>;
let said: { stdout: string; stderr: string };

beforeAll(async () => {
  ensureBuilt();
  await generateStorm({ ...SMALL, folder: storm });
  // The one thing that no file says: the naive network keeps UTC+1 all year, as its owner would tell.
  plan = planFor(storm, (document) => document.setIn(["gauges", 1, "zone"], "UTC+01:00"));
  const { status, ...rest } = total(plan, "run", ["--workers", "1"]);
  if (status !== 0) throw new Error(`total ended with ${status}: ${rest.stderr}`);
  said = rest;
  arrays = await readNetCdf(path.join(run, "totals.nc"));
});

const array = (name: string) => arrayOf(arrays, name);

interface Truth {
  readonly grid: { westM: number; northM: number; cellM: number; nx: number; ny: number };
  readonly catchments: readonly { id: string; depthMm?: number; meanMm?: number }[];
}

function truthJson(): Truth {
  return JSON.parse(readFileSync(path.join(storm, "truth", "truth.json"), "utf8")) as Truth;
}

/** True depth at the centre of every cell of the run, moved by whole cells; NaN beyond the truth's grid. */
function truthOnGrid(columnsEast = 0, rowsSouth = 0): Float64Array {
  const { grid } = truthJson();
  const bytes = readFileSync(path.join(storm, "truth", "depth_total_mm.f32"));
  const depthMm = new Float32Array(bytes.buffer, bytes.byteOffset, bytes.byteLength / 4);
  const { values: x } = array("x");
  const { values: y } = array("y");
  // Both grids are Lambert azimuthal equal-area about 52.5 N 3 E, so their metres are the same metres.
  return Float64Array.from({ length: x.length * y.length }, (_, cell) => {
    const column = Math.floor((x[cell % x.length]! - grid.westM) / grid.cellM) - columnsEast;
    const row = Math.floor((grid.northM - y[Math.floor(cell / x.length)]!) / grid.cellM) - rowsSouth;
    const inside = column >= 0 && column < grid.nx && row >= 0 && row < grid.ny;
    return inside ? depthMm[row * grid.nx + column]! : Number.NaN;
  });
}

interface Likeness {
  readonly cells: number;
  readonly ratio: number;
  readonly rmseMm: number;
  readonly correlation: number;
}

/** Ratio of sums (field / truth), root mean square error and Pearson correlation, from their definitions. */
function likeness(field: ArrayLike<number>, truth: ArrayLike<number>): Likeness {
  let [n, f, t, ff, tt, ft, square] = [0, 0, 0, 0, 0, 0, 0];
  for (let cell = 0; cell < field.length; cell++) {
    const [a, b] = [field[cell]!, truth[cell]!];
    if (Number.isNaN(a) || Number.isNaN(b)) continue;
    n++;
    f += a;
    t += b;
    ff += a * a;
    tt += b * b;
    ft += a * b;
    square += (a - b) ** 2;
  }
  const covariance = ft / n - (f / n) * (t / n);
  return {
    cells: n,
    ratio: f / t,
    rmseMm: Math.sqrt(square / n),
    correlation: covariance / Math.sqrt((ff / n - (f / n) ** 2) * (tt / n - (t / n) ** 2)),
  };
}

describe("the totals of an invented storm against its truth", () => {
  test("lie in the band that the planted faults allow, and the figures are printed", () => {
    const truth = truthOnGrid();
    const radar = likeness(array("radar_total").values, truth);
    const adjusted = likeness(array("adjusted_total").values, truth);
    const line = (name: string, { cells, ratio, rmseMm, correlation }: Likeness) =>
      `${name}: field/truth ${ratio.toFixed(3)}, RMSE ${rmseMm.toFixed(2)} mm, r ${correlation.toFixed(3)}, ${cells} cells`;
    console.log(`${line("radar alone", radar)}\n${line("adjusted", adjusted)}`);

    expect(radar.cells).toBe(array("x").values.length * array("y").values.length);
    // Nobody chose the relation. Published ones give depths that differ by a factor of 1.7 for this very echo, and
    // the offsets planted (-1 and +1.5 dB) are -13 % and +24 % of R at b = 1.6. What was measured when this was
    // written was 0.68; a field halved or doubled leaves the band.
    expect(radar.ratio).toBeGreaterThan(0.45);
    expect(radar.ratio).toBeLessThan(0.95);
    expect(radar.rmseMm).toBeLessThan(6);
    expect(radar.correlation).toBeGreaterThan(0.95);
    // One factor mends the mean. It is pulled low by gauges that read low in heavy rain, and by planted faults that
    // nothing finds yet (a dead gauge, one in inches): 0.90 was measured.
    expect(adjusted.ratio).toBeGreaterThan(0.8);
    expect(adjusted.ratio).toBeLessThan(1.15);
    expect(adjusted.rmseMm).toBeLessThan(Math.min(3, radar.rmseMm));
    expect(adjusted.correlation).toBeGreaterThan(0.95);
  });

  test("lie where the truth lies: any shift by two cells, or a mirror, fits worse", () => {
    const field = array("radar_total").values;
    const inPlace = likeness(field, truthOnGrid()).correlation;
    for (const [east, south] of [
      [2, 0],
      [-2, 0],
      [0, 2],
      [0, -2],
    ] as const) {
      expect(likeness(field, truthOnGrid(east, south)).correlation).toBeLessThan(inPlace - 0.01);
    }
    const nx = array("x").values.length;
    const mirrored = truthOnGrid().map((_, cell, all) => all[cell - (cell % nx) + (nx - 1 - (cell % nx))]!);
    expect(likeness(field, mirrored).correlation).toBeLessThan(inPlace - 0.2);
  });

  test("a total is the sum of its intervals, and a cell's shares are whole", () => {
    for (const [sum, parts] of [
      ["radar_total", "radar_depth"],
      ["adjusted_total", "adjusted_depth"],
    ] as const) {
      const whole = array(sum).values;
      const { values, shape } = array(parts);
      expect(shape).toEqual([2, ...array(sum).shape]);
      for (let cell = 0; cell < whole.length; cell++) {
        // One rounding to float32: half a unit in the last place.
        const expected = values[cell]! + values[whole.length + cell]!;
        expect(Math.abs(whole[cell]! - expected)).toBeLessThanOrEqual(expected * 2 ** -24 + 1e-12);
      }
    }
    const { values: share } = array("radar_share");
    const observed = array("observed_fraction").values;
    let seen = 0;
    for (let cell = 0; cell < observed.length; cell++) {
      if (observed[cell] === 0) continue;
      seen++;
      expect(share[cell]! + share[observed.length + cell]!).toBeCloseTo(1, 5);
    }
    expect(seen).toBe(observed.length);
  });

  test("a catchment's window is the sum of its steps, and catchments lie in the band of the map", () => {
    const rows = csvRows(path.join(run, "catchments.csv"));
    const ids = [...new Set(rows.map((row) => row.catchment_id!))];
    expect(ids).toEqual(["SM-01", "SM-02", "SM-03", "SM-04", "SM-05"]);
    for (const id of ids) {
      const [window, ...steps] = rows.filter((row) => row.catchment_id === id);
      expect(window).toMatchObject({ start: "2031-05-20T12:00:00Z", end: "2031-05-20T14:00:00Z" });
      expect(steps.length).toBe(24);
      for (const column of ["radar_mm", "adjusted_mm", "depth_mm"]) {
        const sum = steps.reduce((mm, step) => mm + Number(step[column]), 0);
        // Twenty-five figures rounded to 0.001 mm each.
        expect(Math.abs(sum - Number(window![column]))).toBeLessThanOrEqual(0.0125 + 1e-9);
      }
      expect(window!.depth_mm).toBe(window!.adjusted_mm);
      expect(window!.observed_fraction).toBe("1.0000");
      expect(Number(window!.max_cell_mm)).toBeGreaterThanOrEqual(Number(window!.depth_mm));
    }
  });

  test("gauge ids come out as they went in, and planted faults are named", () => {
    const ids = csvRows(path.join(run, "gauges.csv")).map((row) => row.gauge_id);
    expect(ids).toContain("007");
    expect(ids).toContain("NO");
    expect(said.stderr).toContain(
      "moor M13: it lies outside the grid; widen the grid in the plan (westM, northM, nx, ny), if a radar reaches it\n",
    );
    expect(said.stderr).toContain(
      "saltwater SW-10: it has readings but no station; add it to the stations file",
    );
    const spiked = csvRows(path.join(run, "gauges.csv")).find((row) => row.gauge_id === "M03");
    expect(spiked).toMatchObject({ verdict: "leave out", cause: "spike" });
  });

  test("the report gives each catchment's wettest cell, as catchments.csv has it", () => {
    const report = readFileSync(path.join(run, "report.html"), "utf8");
    const table = /Catchments<\/h2>[\s\S]*?<\/table>/.exec(report)![0];
    for (const id of ["SM-01", "SM-02", "SM-03", "SM-04", "SM-05"]) {
      const row = table.split("<tr>").find((text) => text.includes(id))!;
      const cells = [...row.matchAll(/<td class="number[^"]*">([^<]*)/g)].map((match) => match[1]);
      const figure = csvRows(path.join(run, "catchments.csv")).find((one) => one.catchment_id === id)!;
      expect(cells[4]).toBe(Number(figure.max_cell_mm).toFixed(1));
    }
  });
});

describe("same input, same plan, same bytes", () => {
  test("two workers, another zone and language, files made in another order under another folder", () => {
    const twin = path.join(scratch, "elsewhere", "zz storm");
    mkdirSync(twin, { recursive: true });
    const files = readdirSync(storm, { recursive: true, withFileTypes: true })
      .filter((entry) => entry.isFile() && !entry.parentPath.startsWith(run))
      .map((entry) => path.relative(storm, path.join(entry.parentPath, entry.name)));
    for (const file of files.sort().reverse()) {
      mkdirSync(path.dirname(path.join(twin, file)), { recursive: true });
      cpSync(path.join(storm, file), path.join(twin, file));
    }
    const env = { TZ: "Pacific/Apia", LANG: "tr_TR.UTF-8", LC_ALL: "tr_TR.UTF-8" };
    const { status, stderr } = total(path.join(twin, "plan.yaml"), "out", ["--workers", "2"], env);
    expect(status, stderr).toBe(0);
    const first = fingerprints(run);
    expect(Object.keys(first).length).toBe(manifestOf(run).outputs.length + 1);
    expect(fingerprints(path.join(twin, "out"))).toEqual(first);
  });

  test("a run that was interrupted ends with 130, goes on where it stopped, and gives the same bytes", async () => {
    const out = path.join(storm, "stopped");
    const child = spawn(process.execPath, [MAIN, "total", "plan.yaml", "--out", "stopped"], {
      cwd: storm,
      stdio: "ignore",
    });
    const ended = new Promise<number | null>((resolve) => child.once("exit", (code) => resolve(code)));
    const units = path.join(out, ".unfinished", "units");
    while (child.exitCode === null && !existsSync(path.join(units, "unit-00000"))) await sleep(5);
    child.kill("SIGINT");
    expect(await ended).toBe(130);
    expect(readdirSync(out)).toEqual([".unfinished"]);

    const resumed = total(plan, "stopped");
    expect(resumed.status, resumed.stderr).toBe(0);
    expect(resumed.stdout).toContain("(1 unit of work was there from before)");
    expect(fingerprints(out)).toEqual(fingerprints(run));
  });

  test("a run that is there already is left as it is", () => {
    const before = touchedAt(run);
    const { status, stdout } = total(plan, "run");
    expect(status).toBe(0);
    expect(stdout).toBe("run holds this run already, finished and unchanged: nothing was done.\n");
    expect(touchedAt(run)).toEqual(before);
  });

  test("another plan into the same folder is refused; --force moves the old run aside, whole", () => {
    const before = fingerprints(run);
    const other = editPlan(plan, path.join(storm, "other.yaml"), (document) => {
      document.set("title", "Another total");
    });
    const refused = total(other, "run");
    expect(refused.status).toBe(2);
    expect(refused.stderr).toContain("error: this folder holds another run\n");
    expect(refused.stderr).toMatch(/where: .*\/run\n {2}fix: {3}choose another --out, or add --force/);
    expect(fingerprints(run)).toEqual(before);

    const forced = total(other, "run", ["--force"]);
    expect(forced.status, forced.stderr).toBe(0);
    expect(forced.stderr).toContain("what was in that folder was moved to run.before-1\n");
    expect(fingerprints(`${run}.before-1`)).toEqual(before);
    expect(manifestOf(run)).toMatchObject({ title: "Another total" });
    // The plan's title stands in it; the depths are the same depths.
    expect(fingerprints(run)["radar_total.tif"]).toBe(before["radar_total.tif"]);
  });
});
