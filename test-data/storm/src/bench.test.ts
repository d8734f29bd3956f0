import { mkdtempSync, readdirSync, readFileSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { type Dataset, type Group, File as Hdf5File, ready } from "h5wasm/node";
import { afterAll, beforeAll, expect, test } from "vitest";
import { generateBenchVolumes } from "./bench.ts";

const folder = mkdtempSync(join(tmpdir(), "bench-"));
const VOLUMES = 50;

beforeAll(async () => {
  await ready;
  await generateBenchVolumes({ folder, volumes: VOLUMES, sweeps: 2, gates: 120 });
});
afterAll(() => {
  rmSync(folder, { recursive: true });
});

function attribute(file: Hdf5File, group: string, name: string): unknown {
  return (file.get(group) as Group).attrs[name]?.value;
}

test("every volume carries its own times", () => {
  const names = readdirSync(join(folder, "radar")).sort();
  expect(names).toHaveLength(VOLUMES);
  names.forEach((name, i) => {
    const file = new Hdf5File(join(folder, "radar", name), "r");
    const start = new Date(Date.UTC(2030, 0, 1, 0, 5 * i));
    const date = start.toISOString().slice(0, 10).replaceAll("-", "");
    const time = start.toISOString().slice(11, 19).replaceAll(":", "");
    expect([attribute(file, "what", "date"), attribute(file, "what", "time")]).toEqual([date, time]);
    expect([
      attribute(file, "dataset1/what", "startdate"),
      attribute(file, "dataset1/what", "starttime"),
    ]).toEqual([date, time]);
    expect(attribute(file, "dataset2/what", "endtime")).toMatch(/^\d{4}15$/);
    file.close();
  });
});

test("between 30 and 45 % of the lowest sweep has echo, in one compressed chunk", () => {
  let echo = 0;
  let gates = 0;
  for (const name of readdirSync(join(folder, "radar"))) {
    const file = new Hdf5File(join(folder, "radar", name), "r");
    const data = file.get("dataset1/data1/data") as Dataset;
    expect(data.metadata.chunks).toEqual([360, 120]);
    const stored = data.value as Uint8Array;
    gates += stored.length;
    echo += stored.filter((code) => code > 0).length;
    file.close();
  }
  expect(echo / gates).toBeGreaterThan(0.3);
  expect(echo / gates).toBeLessThan(0.45);
});

test("gauges have one line a station and round, stamped at the end of the round", () => {
  const lines = readFileSync(join(folder, "gauges_5min.csv"), "utf8").trim().split("\n");
  const stations = readFileSync(join(folder, "stations.csv"), "utf8").trim().split("\n");
  expect(lines[0]).toBe("station,time,value");
  expect(stations[0]).toBe("id,lon,lat");
  expect(lines).toHaveLength(1 + VOLUMES * (stations.length - 1));
  expect(lines[1]).toMatch(/^B01,2030-01-01T00:05:00Z,\d+\.\d\d$/);
});
