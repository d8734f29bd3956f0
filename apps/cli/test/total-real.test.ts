import { copyFileSync, existsSync, mkdirSync, readdirSync, readFileSync } from "node:fs";
import path from "node:path";
import geodesicLibrary from "geographiclib-geodesic";
import { beforeAll, describe, expect, test } from "vitest";
import { cli, ensureBuilt } from "./run-cli.ts";
import { arrayOf, planFor, readNetCdf, scratchFolder, total, writeIn } from "./total-kit.ts";

const REAL = process.env.RAINRECKON_REAL;

/** The real scans whose names match, copied to a folder of their own. */
function copyOf(name: string, pattern: RegExp): string {
  const from = REAL ?? "";
  if (!existsSync(from)) throw new Error(`RAINRECKON_REAL names ${from}, which is not there`);
  const folder = path.join(scratch, name);
  mkdirSync(folder);
  for (const file of readdirSync(from).filter((one) => pattern.test(one)))
    copyFileSync(path.join(from, file), path.join(folder, file));
  return folder;
}

const scratch = scratchFolder("real");
/** where/lon and where/lat of the ten files, read with a general HDF5 library. */
const TEN_FILES_SITE = { lonDeg: 3.81181, latDeg: 50.12832 };

describe.skipIf(REAL === undefined)("real scans (skipped unless RAINRECKON_REAL names their folder)", () => {
  beforeAll(ensureBuilt);

  describe("two rounds in ten files of one sweep each, plan unedited", () => {
    let folder: string;
    let said: string;
    beforeAll(() => {
      folder = copyOf("two-rounds", /_LFPW_/);
      expect(readdirSync(folder).length).toBe(10);
      planFor(folder);
      const { status, stdout, stderr } = total(path.join(folder, "plan.yaml"), "run");
      expect(status, stderr).toBe(0);
      said = stdout;
    });

    test("far out only the lowest sweep speaks: 8 min 15 s of ten are observed, and 3 min 15 s of them at the edges", async () => {
      const arrays = await readNetCdf(path.join(folder, "run", "totals.nc"));
      // By hand, from the start and end of the 0.4 degree sweeps as a general HDF5 library reads them: they speak for
      // 06:54:15.0 and 06:59:15.5, one round of 300.5 s apart. Half a round before the first: 06:51:44.75; half a round
      // after the last would be 07:01:45.75, but the window ends at 07:00:00.
      const windowS = 600;
      const roundS = 300.5;
      const beforeS = roundS / 2;
      const afterS = 3600 - (59 * 60 + 15.5);
      expect(beforeS + afterS).toBe(194.75);
      const shares = {
        both: {
          observed: (beforeS + roundS + afterS) / windowS,
          edge: (beforeS + afterS) / windowS,
        },
        firstOnly: { observed: beforeS / windowS, edge: beforeS / windowS },
        lastOnly: { observed: afterS / windowS, edge: afterS / windowS },
      };
      const [lon, lat] = [arrayOf(arrays, "lon").values, arrayOf(arrays, "lat").values];
      const [fraction, edges] = [
        arrayOf(arrays, "observed_fraction").values,
        arrayOf(arrays, "edge_fraction").values,
      ];
      const bridged = arrayOf(arrays, "bridged_fraction").values;
      // The 4/3-earth height of the 1 degree sweep passes 3000 m at 127 km (Doviak and Zrnic, 1993, eq. 2.28b), that
      // of the 0.4 degree sweep at 174 km: between them only the lowest sweep may speak.
      const kinds = { both: 0, firstOnly: 0, lastOnly: 0 };
      for (let cell = 0; cell < lon.length; cell++) {
        const { s12 = 0 } = geodesicLibrary.Geodesic.WGS84.Inverse(
          TEN_FILES_SITE.latDeg,
          TEN_FILES_SITE.lonDeg,
          lat[cell]!,
          lon[cell]!,
        );
        if (s12 < 132_000 || s12 > 148_000 || fraction[cell] === 0) continue;
        // A gate that one of the two scans marks as nodata is spoken for by the other alone, at its edge.
        const kind = (Object.keys(kinds) as (keyof typeof kinds)[]).find(
          // The plan holds the round in minutes to three decimals: 0.03 s.
          (one) => Math.abs(fraction[cell]! - shares[one].observed) < 1e-4,
        );
        if (kind === undefined) throw new Error(`an observed share of ${fraction[cell]} at ${s12} m`);
        kinds[kind]++;
        expect(Math.abs(edges[cell]! - shares[kind].edge)).toBeLessThan(1e-4);
        expect(bridged[cell]).toBe(0);
      }
      expect(kinds.both).toBeGreaterThan(5000);
      expect(kinds.both).toBeGreaterThan(20 * (kinds.firstOnly + kinds.lastOnly));
    });

    test("the terminal prints the minutes observed, and calls the depth a lower bound", () => {
      const [, minutes, of] = /observed ([\d.]+) of (\d+) minutes on average/.exec(said) ?? [];
      expect(of).toBe("10");
      expect(Number(minutes)).toBeGreaterThan(6);
      expect(Number(minutes)).toBeLessThan(9);
      expect(said).toMatch(/^at least \d+\.\d+ mm over the whole map/m);
      expect(said).toMatch(/^! Only \d+ % of area and time was observed: the depth is a lower bound\.$/m);
      expect(said).not.toMatch(/observed 10 /);
    });

    test("the report does not call it ten minutes either", () => {
      const report = readFileSync(path.join(folder, "run", "report.html"), "utf8");
      expect(report).toMatch(/≥/);
      expect(report).not.toMatch(/100 %<\/td>/);
    });
  });

  test("one volume of one site: a rate, not a total, exit 3", () => {
    const folder = copyOf("one-volume", /_ENMI_/);
    expect(readdirSync(folder).length).toBe(1);
    const planned = cli(["plan", ".", "-o", "plan.yaml", "--quiet"], folder);
    expect(planned.status).toBe(3);
    expect(planned.stderr).toContain("error: one instant per site is a rate, not a total\n");
    const plan = writeIn(
      folder,
      "by-hand.yaml",
      `title: One instant
window: { from: 2017-04-21T09:05:00Z, to: 2017-04-21T09:15:00Z }
scans: ["*.hdf"]
radars: [{ id: norst, medianRoundMinutes: 7.5, maxGapMinutes: 18.75 }]
intervals: { grids: PT10M }
pairs: { interval: PT10M }
grid: { crs: +proj=laea +lat_0=67.5 +lon_0=12.1 +ellps=GRS80, westM: -50000, northM: 50000, cellM: 2000, nx: 50, ny: 50 }
`,
    );
    const { status, stderr, stdout } = total(plan, "run");
    expect(status, stderr).toBe(3);
    expect(stderr).toMatch(
      /^error: one instant per site is a rate, not a total\n {2}where: radars norst, window .*\n {2}fix: {3}add the scans before or after it/m,
    );
    expect(stdout).toBe("");
    expect(existsSync(path.join(folder, "run"))).toBe(false);
  });
});
