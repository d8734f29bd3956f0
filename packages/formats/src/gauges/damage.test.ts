import { readFileSync } from "node:fs";
import { fileURLToPath } from "node:url";
import type { Catchment, GaugeSeries } from "@rainreckon/core";
import { describe, expect, test } from "vitest";
import { damaged, outcomeOf, seededNumbers } from "../../test/damage.ts";
import { scratchFolder } from "../../test/scratch.ts";
import { readCatchments } from "./catchments.ts";
import type { GaugeFileSpec } from "./gauge-file-spec.ts";
import { readGaugeFile } from "./read-gauge-files.ts";
import { sniffMap } from "./sniff-map.ts";
import { sniffTable } from "./sniff-table.ts";
import { readStations } from "./stations.ts";

/*
 * Damaged files by the thousand, each seed the same damage. Whatever comes, a reader says what is wrong and
 * in which file, or gives a result that hangs together and holds no number that the file does not.
 */
const CASES = 2000;
const folder = scratchFolder();
const quiet = () => {};
const fixture = (name: string) => fileURLToPath(new URL(`../../test/fixtures/maps/${name}`, import.meta.url));

const SPEC: GaugeFileSpec = {
  network: "moor",
  layout: "long",
  columns: { gauge: "gauge", time: "time", value: "value", quality: "flag" },
  kind: "increments",
  unit: "mm",
  stepMinutes: 5,
  stamp: "end",
  zone: "UTC+01:00",
  dst: "follow",
  silence: "missing",
  missing: ["", "-999"],
  quality: { use: ["G"], doubt: ["S"], drop: ["X"], accumulated: ["A"] },
};

/** Series that hang together: in order, apart, depths that stand in the file. */
function checkSeries(series: readonly GaugeSeries[], text: string, part: RegExp): void {
  const written = new Set(text.split(part).map((cell) => Number(cell.trim())));
  for (const { id, startEpochMs, endEpochMs, depthMm, quality } of series) {
    expect(id).not.toBe("");
    let before = Number.NEGATIVE_INFINITY;
    for (let k = 0; k < depthMm.length; k++) {
      const sound =
        startEpochMs[k] >= before &&
        endEpochMs[k] > startEpochMs[k] &&
        quality[k] <= 2 &&
        (Number.isNaN(depthMm[k]) || depthMm[k] === 0 || (depthMm[k] > 0 && written.has(depthMm[k])));
      if (!sound)
        throw new Error(`reading ${k} of ${id}: (${startEpochMs[k]}, ${endEpochMs[k]}] ${depthMm[k]}`);
      before = endEpochMs[k];
    }
  }
}

/** Catchments that hang together: closed rings of positions that stand in the file. */
function checkCatchments(catchments: readonly Catchment[], holds: (x: number, y: number) => boolean): void {
  expect(catchments.length).toBeGreaterThan(0);
  expect(new Set(catchments.map(({ id }) => id)).size).toBe(catchments.length);
  for (const { id, polygons } of catchments) {
    expect(id).not.toBe("");
    for (const ring of polygons.flat()) {
      expect(ring.length).toBeGreaterThanOrEqual(4);
      expect(ring[0]).toEqual(ring[ring.length - 1]);
      for (const [x, y] of ring)
        if (!holds(x, y)) throw new Error(`${id}: ${x}, ${y} does not stand in the file`);
    }
  }
}

function doublesIn(bytes: Buffer): (x: number, y: number) => boolean {
  const pair = Buffer.alloc(16);
  return (x, y) => {
    pair.writeDoubleLE(x, 0);
    pair.writeDoubleLE(y, 8);
    if (bytes.includes(pair)) return true;
    pair.writeDoubleBE(x, 0);
    pair.writeDoubleBE(y, 8);
    return bytes.includes(pair);
  };
}

/** The first look goes by the same readers: one case in ten is enough. */
let looks = 0;
async function sometimes(look: () => Promise<unknown>): Promise<void> {
  looks += 1;
  if (looks % 10 === 0) await look();
}

/** Runs the cases; every other one keeps the head by which its format is told. */
async function damageAll(
  seed: number,
  original: Uint8Array,
  head: number,
  one: (bytes: Buffer) => Promise<"refused" | "read">,
  cases = CASES,
): Promise<{ refused: number; read: number }> {
  const next = seededNumbers(seed);
  const outcome = { refused: 0, read: 0 };
  for (let k = 0; k < cases; k++) outcome[await one(damaged(original, next, k % 2 === 0 ? head : 0))] += 1;
  expect(outcome.refused + outcome.read).toBe(cases);
  // A reader that refused everything, or nothing, would pass unseen.
  expect(outcome.read).toBeGreaterThan(cases / 100);
  expect(outcome.refused).toBeGreaterThan(cases / 100);
  return outcome;
}

describe(`${CASES} damaged files of each kind`, { timeout: 60_000 }, () => {
  test("gauge tables", async () => {
    const rows = Array.from({ length: 24 }, (_, k) => {
      const stamp = new Date(Date.UTC(2031, 9, 25, 23) + k * 300_000).toISOString().slice(0, 16);
      return `${k % 2 === 0 ? "007" : "Mühle"},${stamp},${k % 5 === 0 ? "-999" : (k * 0.3).toFixed(1)},${"GSXA"[k % 4]}`;
    });
    const text = ["gauge,time,value,flag", ...rows, ""].join("\n");
    await damageAll(11, Buffer.from(text), "gauge,time,value,flag\n".length, async (bytes) => {
      const path = folder.write("gauges.csv", bytes);
      await sometimes(() => outcomeOf(() => sniffTable(path), [path]));
      // Working out a zone's changes costs more than reading so short a file.
      const zone = bytes.length % 8 === 0 ? "Europe/Berlin" : SPEC.zone;
      const outcome = await outcomeOf(() => readGaugeFile(path, { ...SPEC, zone }, quiet), [path]);
      if (outcome === "refused") return "refused";
      const { series, counts } = outcome.value;
      checkSeries(series, bytes.toString("utf8"), /[,;\n\r"]/);
      expect(counts.rows).toBeLessThanOrEqual(bytes.toString("latin1").split("\n").length);
      return "read";
    });
  });

  test("station tables", async () => {
    const text =
      "id;name;x;y;z;from;to;tip\n007;Mühle;9,1;51,2;120;2020-01-01;2025-12-31;0,2\n007;Mühle;9,2;51,2;121;2026-01-01;;0,1\nNO;Moor;9,3;51,3;;;;\n";
    const columns = {
      id: "id",
      name: "name",
      x: "x",
      y: "y",
      elevation: "z",
      validFrom: "from",
      validTo: "to",
      tipMm: "tip",
    };
    await damageAll(
      12,
      Buffer.from(text),
      26,
      async (bytes) => {
        const path = folder.write("stations.csv", bytes);
        await sometimes(() => outcomeOf(() => sniffTable(path), [path]));
        const outcome = await outcomeOf(
          () => readStations(path, columns, quiet, { decimal: "comma" }),
          [path],
        );
        if (outcome === "refused") return "refused";
        for (const { id, x, y } of outcome.value) {
          expect(id).not.toBe("");
          expect(Number.isFinite(x) && Number.isFinite(y)).toBe(true);
        }
        return "read";
      },
      CASES / 4,
    );
  });

  test("WaterML", async () => {
    const points = Array.from(
      { length: 6 },
      (_, k) =>
        `<wml2:point><wml2:MeasurementTVP><wml2:time>2031-05-27T12:${String(5 * k).padStart(2, "0")}:00Z</wml2:time><wml2:value>${(0.7 * k).toFixed(1)}</wml2:value></wml2:MeasurementTVP></wml2:point>`,
    ).join("\n");
    const text = `<?xml version="1.0"?>\n<wml2:Collection xmlns:wml2="http://www.opengis.net/waterml/2.0" xmlns:om="http://www.opengis.net/om/2.0" xmlns:xlink="http://www.w3.org/1999/xlink"><wml2:observationMember><om:OM_Observation><om:featureOfInterest xlink:href="#A"/><om:result>\n<wml2:MeasurementTimeseries><wml2:defaultPointMetadata><wml2:DefaultTVPMeasurementMetadata><wml2:uom code="mm"/></wml2:DefaultTVPMeasurementMetadata></wml2:defaultPointMetadata>${points}</wml2:MeasurementTimeseries></om:result></om:OM_Observation></wml2:observationMember></wml2:Collection>`;
    const spec: GaugeFileSpec = { ...SPEC, layout: "waterml2", columns: {}, quality: undefined };
    await damageAll(13, Buffer.from(text), 90, async (bytes) => {
      const path = folder.write("series.xml", bytes);
      await sometimes(() => outcomeOf(() => sniffTable(path), [path]));
      const outcome = await outcomeOf(() => readGaugeFile(path, spec, quiet), [path]);
      if (outcome === "refused") return "refused";
      checkSeries(outcome.value.series, bytes.toString("utf8"), /[<>]/);
      return "read";
    });
  });

  test("GeoJSON", async () => {
    const original = readFileSync(fixture("moor.geojson"));
    await damageAll(14, original, 40, async (bytes) => {
      const path = folder.write("map.geojson", bytes);
      await sometimes(() => outcomeOf(() => sniffMap(path), [path]));
      const outcome = await outcomeOf(
        () => readCatchments(path, { id: "code", name: "name" }, quiet),
        [path],
      );
      if (outcome === "refused") return "refused";
      const written = new Set(
        bytes
          .toString("utf8")
          .split(/[[\],]/)
          .map(Number),
      );
      checkCatchments(outcome.value, (x, y) => written.has(x) && written.has(y));
      return "read";
    });
  });

  test.each(["shp", "dbf"] as const)("Shapefiles, damaged in their .%s", async (ending) => {
    const files = {
      shp: fixture("moor-utf8.shp"),
      dbf: fixture("moor-utf8.dbf"),
      prj: fixture("moor-utf8.prj"),
      cpg: fixture("moor-utf8.cpg"),
    };
    const shapes = readFileSync(files.shp);
    await damageAll(
      ending === "shp" ? 15 : 16,
      readFileSync(files[ending]),
      36,
      async (bytes) => {
        const path = folder.write(`map.${ending}`, bytes);
        const { shp, ...parts } = { ...files, [ending]: path };
        await sometimes(() => outcomeOf(() => sniffMap(shp, { parts }), [shp, path]));
        const outcome = await outcomeOf(
          () => readCatchments(shp, { id: "code", name: "name", parts }, quiet),
          [shp, path],
        );
        if (outcome === "refused") return "refused";
        checkCatchments(outcome.value, doublesIn(ending === "shp" ? bytes : shapes));
        return "read";
      },
      CASES / 2,
    );
  });

  test("GeoPackages", async () => {
    await damageAll(17, readFileSync(fixture("small.gpkg")), 100, async (bytes) => {
      const path = folder.write("map.gpkg", bytes);
      const outcome = await outcomeOf(
        () => readCatchments(path, { id: "code", name: "name", layer: "degrees" }, quiet),
        [path],
      );
      if (outcome === "refused") return "refused";
      checkCatchments(outcome.value, doublesIn(bytes));
      return "read";
    });
  });
});
