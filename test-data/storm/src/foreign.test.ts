import { execFileSync } from "node:child_process";
import { mkdtempSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterAll, beforeAll, describe, expect, test } from "vitest";
import { generateStorm } from "./generate.ts";
import { SMALL } from "./presets.ts";

/** Opens every radar file with h5py and prints, a line a sweep, what stands there. */
const READ_ALL = `
import glob, h5py, json, sys
for path in sorted(glob.glob(sys.argv[1] + "/radar/*/*.h5")):
    with h5py.File(path, "r") as f:
        for d in sorted(k for k in f if k.startswith("dataset")):
            g = f[d]
            data = {}
            for m in sorted(k for k in g if k.startswith("data")):
                w = g[m]["what"].attrs
                a = g[m]["data"][()]
                data[w["quantity"].decode()] = {"shape": a.shape, "dtype": str(a.dtype), "echo": int((a != w["undetect"]).sum()),
                                                "missing": int((a == w["nodata"]).sum())}
            print(json.dumps({"object": f["what"].attrs["object"].decode(), "source": f["what"].attrs["source"].decode(),
                "elangle": float(g["where"].attrs["elangle"]), "rscale": float(g["where"].attrs["rscale"]),
                "nrays": int(g["where"].attrs["nrays"]), "nbins": int(g["where"].attrs["nbins"]),
                "start": g["what"].attrs["starttime"].decode(), "end": g["what"].attrs["endtime"].decode(), "data": data}))
`;

interface ForeignSweep {
  readonly object: string;
  readonly source: string;
  readonly elangle: number;
  readonly nrays: number;
  readonly nbins: number;
  readonly start: string;
  readonly end: string;
  readonly data: Readonly<Record<string, { shape: number[]; dtype: string; echo: number; missing: number }>>;
}

describe.skipIf(process.env.RAINRECKON_FOREIGN_TOOLS !== "1")(
  "read back by other people's tools (skipped unless RAINRECKON_FOREIGN_TOOLS=1)",
  () => {
    const folder = mkdtempSync(join(tmpdir(), "storm-foreign-"));
    const minutes = 20;
    let sweeps: ForeignSweep[] = [];

    beforeAll(async () => {
      await generateStorm({ ...SMALL, folder, minutes });
      const printed = execFileSync("/usr/bin/python3", ["-c", READ_ALL, folder], { encoding: "utf8" });
      sweeps = printed
        .trim()
        .split("\n")
        .map((line) => JSON.parse(line) as ForeignSweep);
    });
    afterAll(() => {
      rmSync(folder, { recursive: true });
    });

    test("h5py finds every sweep of every round, in volumes and in files of one sweep", () => {
      const rounds = minutes / SMALL.roundMinutes;
      for (const radar of SMALL.radars) {
        const own = sweeps.filter(({ source }) => source.startsWith(`NOD:${radar.node},`));
        expect(own).toHaveLength(rounds * radar.sweeps.length);
        expect(new Set(own.map(({ object }) => object))).toEqual(
          new Set([radar.files === "volumes" ? "PVOL" : "SCAN"]),
        );
        for (const sweep of own) {
          expect([sweep.nrays, sweep.nbins]).toEqual([360, radar.gateCount]);
          for (const moment of Object.values(sweep.data)) {
            expect(moment.shape).toEqual([360, radar.gateCount]);
            expect(moment.missing).toBe(0);
          }
          expect(Object.keys(sweep.data)).toEqual(
            expect.arrayContaining(["DBZH", "VRADH", "ZDR", "RHOHV", "PHIDP"]),
          );
          expect(sweep.data.DBZH!.dtype).toBe(radar.reflectivityStorage);
        }
      }
    });

    test("h5py finds echo, and no more of it in DBZH than in TH", () => {
      for (const { data } of sweeps) {
        expect(data.DBZH!.echo).toBeGreaterThan(0);
        if (data.TH !== undefined) expect(data.TH.echo).toBeGreaterThanOrEqual(data.DBZH!.echo);
      }
    });

    test("the sweeps of a round start one after another, and the radars' rounds are offset", () => {
      const starts = sweeps
        .filter(({ elangle }) => elangle === 0.5)
        .map(({ start, end }) => `${start}-${end}`);
      expect(starts).toContain("120006-120030");
      expect(starts).toContain("120354-120414");
      expect(new Set(starts).size).toBe(starts.length);
    });

    test("GDAL finds the ridge in the terrain where the plan puts it", () => {
      const info = execFileSync("gdalinfo", [join(folder, "terrain.tif")], { encoding: "utf8" });
      expect(info).toContain('ID["EPSG",4326]');
      // Its middle stands 0.3 km west and 8.1 km north of the middle of the district.
      const at = (lon: string, lat: string): number =>
        Number(
          execFileSync("gdallocationinfo", ["-valonly", "-wgs84", join(folder, "terrain.tif"), lon, lat], {
            encoding: "utf8",
          }),
        );
      // One degree of latitude is 111.27 km at 52.5N on WGS 84 (any geodetic table).
      expect(at("2.9956", String(52.5 + 8.1 / 111.27))).toBeGreaterThan(220);
      expect(at("2.9956", String(52.5 - 8.1 / 111.27))).toBeLessThan(60);
    });
  },
);
