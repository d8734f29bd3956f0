import { spawnSync } from "node:child_process";
import { existsSync, mkdtempSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";

/** For tests: true where the tools of others must be there, so that their absence is a failure. */
export const FOREIGN_TOOLS = process.env.RAINRECKON_FOREIGN_TOOLS === "1";

/** For tests: true where the system has a device that is always full. */
export const FULL_DEVICE = existsSync("/dev/full");

/** For tests: what a tool prints. @throws Error when it is not installed or does not succeed */
export function outputOf(tool: string, args: readonly string[], input = ""): string {
  const { stdout, stderr, status, error } = spawnSync(tool, args, {
    input,
    encoding: "utf8",
    maxBuffer: 1e8,
  });
  if (error !== undefined) throw error;
  if (status !== 0) throw new Error(`${tool} ${args.join(" ")}: ${stderr}`);
  return stdout;
}

/** For tests: a folder of their own. */
export function scratchFolder(): string {
  return mkdtempSync(join(tmpdir(), "rainreckon-write-"));
}

/** For tests: longitude and latitude, WGS 84, of places in a system, by PROJ's cs2cs. */
export function lonLatByProj(
  projString: string,
  places: readonly (readonly [number, number])[],
): { lonDeg: number; latDeg: number }[] {
  const args = ["-f", "%.9f", ...projString.split(" "), "+to", "+proj=longlat", "+datum=WGS84"];
  const lines = outputOf("cs2cs", args, places.map((place) => place.join(" ")).join("\n"));
  return lines
    .trim()
    .split("\n")
    .map((line) => {
      const [lonDeg, latDeg] = line.split(/\s+/).map(Number);
      return { lonDeg, latDeg };
    });
}

/** For tests: what GDAL finds at places of a raster, by longitude and latitude. */
export function valuesByGdal(
  raster: string,
  places: readonly { readonly lonDeg: number; readonly latDeg: number }[],
  band = 1,
): number[] {
  const input = places.map(({ lonDeg, latDeg }) => `${lonDeg} ${latDeg}`).join("\n");
  const text = outputOf("gdallocationinfo", ["-valonly", "-b", String(band), "-wgs84", raster], `${input}\n`);
  return text.trimEnd().split("\n").map(Number);
}

/** For tests: one system for each method that we describe, with offsets, scales and figures of the Earth that tell. */
export const PROJECTIONS: Readonly<Record<string, string>> = {
  laea: "+proj=laea +lat_0=51 +lon_0=4 +x_0=4000 +y_0=-3000 +ellps=GRS80 +units=m +no_defs",
  "tmerc with a datum shift":
    "+proj=tmerc +lat_0=49 +lon_0=-2 +k=0.9996012717 +x_0=400000 +y_0=-100000 +ellps=airy +towgs84=446.448,-125.157,542.06,0.15,0.247,0.842,-20.489 +units=m",
  "utm south": "+proj=utm +zone=33 +south +datum=WGS84 +units=m",
  "polar stereographic by its true parallel":
    "+proj=stere +lat_0=90 +lat_ts=60 +lon_0=10 +a=6378140 +b=6356750 +units=m",
  "polar stereographic by its scale": "+proj=stere +lat_0=-90 +k_0=0.9728 +lon_0=10 +ellps=WGS84 +units=m",
  "oblique stereographic": "+proj=stere +lat_0=52 +lon_0=5 +k=0.9999 +x_0=1000 +y_0=2000 +ellps=bessel",
  "oblique stereographic, double projection with a datum shift":
    "+proj=sterea +lat_0=52.15616055555555 +lon_0=5.38763888888889 +k=0.9999079 +x_0=155000 +y_0=463000 +ellps=bessel +towgs84=565.4171,50.3319,465.5524,1.9342,-1.6677,9.1019,4.0725 +units=m",
  "conformal cone, two parallels":
    "+proj=lcc +lat_0=46.5 +lon_0=3 +lat_1=49 +lat_2=44 +x_0=700000 +y_0=6600000 +ellps=GRS80 +units=m",
  "conformal cone, one parallel, sphere": "+proj=lcc +lat_1=60 +lat_0=60 +lon_0=10 +R=6371000 +units=m",
  "equal-area cone": "+proj=aea +lat_0=23 +lon_0=-96 +lat_1=29.5 +lat_2=45.5 +datum=NAD83 +units=m",
  aeqd: "+proj=aeqd +lat_0=52 +lon_0=10 +ellps=WGS84",
};
