import { copyFileSync, cpSync, mkdirSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import path from "node:path";
import { fileURLToPath } from "node:url";
import type { GaugeSeries } from "@rainreckon/core";
import { readCatchments, readGaugeFiles } from "@rainreckon/formats";
import { generateStorm, TINY } from "@rainreckon/test-data/storm";
import { afterAll, beforeAll, describe, expect, test } from "vitest";
import { type LoadedPlan, loadPlan } from "../src/plan/load.ts";
import { surveySchema } from "../src/survey/findings.ts";
import { survey } from "../src/survey/survey.ts";
import { walkFiles } from "../src/survey/walk.ts";
import { inProcess } from "./run-cli.ts";

/** The invented storm's gauges and other maps, as networks and map makers export them. */
const scratch = mkdtempSync(path.join(tmpdir(), "rainreckon-shapes-"));
const storm = path.join(scratch, "storm");
const maps = fileURLToPath(new URL("../../../packages/formats/test/fixtures/maps", import.meta.url));

beforeAll(() => generateStorm({ ...TINY, folder: storm }));
afterAll(() => rmSync(scratch, { recursive: true }));

function folder(name: string): string {
  const place = path.join(scratch, name);
  cpSync(path.join(storm, "radar"), path.join(place, "radar"), { recursive: true });
  return place;
}

const findingsOf = async (place: string) =>
  surveySchema.parse(
    (
      await survey([place], walkFiles([place]), {
        json: true,
        quiet: true,
        debug: false,
        live: false,
        result: () => undefined,
        note: () => undefined,
        strong: (text) => text,
      })
    ).findings,
  );

async function planOf(place: string): Promise<LoadedPlan> {
  const file = path.join(place, "plan.yaml");
  const { status, stderr } = await inProcess(["plan", place, "-o", file, "--quiet"]);
  expect([status, stderr]).toEqual([0, expect.not.stringContaining("error")]);
  return loadPlan(file);
}

/** Rows of the storm's long network, by gauge. */
function moorRows(): Map<string, string[][]> {
  const [, ...rows] = readFileSync(path.join(storm, "gauges", "moor.csv"), "utf8")
    .trim()
    .split(/\r?\n/);
  const byGauge = new Map<string, string[][]>();
  for (const row of rows.map((line) => line.split(","))) {
    byGauge.set(row[0]!, [...(byGauge.get(row[0]!) ?? []), row]);
  }
  return byGauge;
}

const plain = (series: readonly GaugeSeries[]) =>
  series.map(({ id, endEpochMs, depthMm, quality }) => ({
    id,
    endEpochMs: [...endEpochMs],
    depthMm: [...depthMm],
    quality: [...quality],
  }));
const quiet = () => undefined;

describe("one file per gauge in UTF-16, with a decimal comma, local dates and lines above the header", () => {
  test("gives the same series by way of survey and plan", async () => {
    const place = folder("odd");
    mkdirSync(path.join(place, "tarn"));
    for (const [id, rows] of moorRows()) {
      const body = rows.map(([, stamp, value, flag]) => {
        const local = new Date(Date.parse(stamp!) + 3_600_000).toISOString();
        const date = `${local.slice(8, 10)}.${local.slice(5, 7)}.${local.slice(0, 4)} ${local.slice(11, 16)}`;
        return [date, value!.replace(".", ","), flag].join(";");
      });
      const text = ["Invented", `Gauge: ${id}`, "", "Datum;Regen (mm);Flag", ...body, ""].join("\r\n");
      writeFileSync(path.join(place, "tarn", `export_${id}.csv`), Buffer.from(`\ufeff${text}`, "utf16le"));
    }
    copyFileSync(path.join(storm, "gauges", "moor_stations.csv"), path.join(place, "tarn", "stations.csv"));

    const { plan, gaugeFiles } = await planOf(place);
    expect(plan.gauges).toHaveLength(1);
    const [entry] = gaugeFiles;
    expect(entry!.spec).toMatchObject({
      network: "tarn",
      encoding: "utf-16le",
      headerLine: 4,
      decimal: "comma",
      dates: "dmy",
      idFrom: "label",
      label: "Gauge",
      status: "unknown",
    });
    const odd = await readGaugeFiles(entry!.files, { ...entry!.spec, zone: "UTC+01:00" }, quiet);
    const usual = (await planOf(storm)).gaugeFiles.find(({ spec }) => spec.network === "moor");
    const expected = await readGaugeFiles(usual!.files, usual!.spec, quiet);
    expect(odd.series.length).toBeGreaterThan(10);
    expect(plain(odd.series)).toEqual(plain(expected.series));
  });
});

describe("dates that nothing decides", () => {
  const table = (day: string) => `time,rain_mm\n${day}/05/2031 12:05,0.2\n${day}/05/2031 12:10,0.4\n`;
  const stations = "id,name,lon,lat\n0043,A,3.0,52.5\n0044,B,3.1,52.5\n";

  test("are asked for; a file of the same form with a day above 12 decides", async () => {
    const place = folder("ask");
    mkdirSync(path.join(place, "tarn"));
    writeFileSync(path.join(place, "tarn", "stations.csv"), stations);
    writeFileSync(path.join(place, "tarn", "rain_0043_2031.csv"), table("03"));
    const undecided = await findingsOf(place);
    expect(undecided.gauges[0]).toMatchObject({
      dates: { value: "ask" },
      fileName: "rain_{id}_*",
      firstStamp: null,
    });
    expect(undecided.wrong.map(({ what, fix }) => `${what}; ${fix}`)).toContain(
      "day and month cannot be told apart: no day above 12 tells day and month apart: ask the network; write dates: dmy or dates: mdy in the plan",
    );
    expect((await planOf(place)).plan.gauges[0]).toMatchObject({ dates: "ask", idFrom: "file" });

    writeFileSync(path.join(place, "tarn", "rain_0044_2031.csv"), table("20"));
    const decided = await findingsOf(place);
    expect(decided.gauges.map(({ dates }) => dates.value)).toEqual(["dmy", "dmy"]);
    expect(decided.gauges[0]!.dates.reason).toMatch(
      /can only be day, month, year \(in .*rain_0044_2031\.csv\)/,
    );
  });
});

describe("maps", () => {
  test("a Shapefile with its parts; they are not told as files of their own", async () => {
    const place = folder("shapes");
    for (const ending of ["shp", "dbf", "prj", "cpg", "shx"]) {
      copyFileSync(path.join(maps, `moor-utf8.${ending}`), path.join(place, `moor.${ending}`));
    }
    const findings = await findingsOf(place);
    expect(findings.otherFiles).toEqual([]);
    expect(findings.catchments).toMatchObject([{ format: "Shapefile", polygonCount: 3, crsKnown: true }]);
    const { plan, catchmentsFile, catchmentsParts } = await planOf(place);
    const read = await readCatchments(
      catchmentsFile!,
      { ...plan.catchments!, parts: catchmentsParts },
      quiet,
    );
    expect(read.map(({ id }) => id)).toEqual(["007", "012", "NO"]);
  });

  test("one without a .prj is said, and waits for a code in the plan", async () => {
    const place = folder("lonely");
    for (const ending of ["shp", "dbf"]) {
      copyFileSync(path.join(maps, `moor-utf8.${ending}`), path.join(place, `moor.${ending}`));
    }
    const findings = await findingsOf(place);
    expect(findings.wrong.map(({ what }) => what)).toContain(
      "nothing says what system the coordinates are in",
    );
    expect((await planOf(place)).plan.catchments?.crs).toBe("WRITE ITS EPSG CODE");
  });

  test("a GeoPackage of several layers: the plan names one, and survey the others", async () => {
    const place = folder("package");
    copyFileSync(path.join(maps, "moor.gpkg"), path.join(place, "moor.gpkg"));
    const findings = await findingsOf(place);
    expect(findings.catchments[0]).toMatchObject({ format: "GeoPackage", layers: ["degrees", "upland"] });
    const { plan, catchmentsFile } = await planOf(place);
    expect(plan.catchments?.layer).toBe("degrees");
    expect(await readCatchments(catchmentsFile!, plan.catchments!, quiet)).toHaveLength(3);
  });
});

test("WaterML with positions needs no table of stations; a table of assets is one", async () => {
  const place = folder("waterml");
  const point = (time: string, value: string) =>
    `<wml2:point><wml2:MeasurementTVP><wml2:time>2031-05-20T${time}:00Z</wml2:time><wml2:value>${value}</wml2:value></wml2:MeasurementTVP></wml2:point>`;
  const series = (id: string) =>
    `<wml2:Collection xmlns:wml2="http://www.opengis.net/waterml/2.0" xmlns:om="http://www.opengis.net/om/2.0" xmlns:gml="http://www.opengis.net/gml/3.2" xmlns:sams="http://www.opengis.net/samplingSpatial/2.0" xmlns:xlink="http://www.w3.org/1999/xlink"><wml2:observationMember><om:OM_Observation><om:featureOfInterest><wml2:MonitoringPoint gml:id="${id}"><gml:identifier>${id}</gml:identifier><sams:shape><gml:Point><gml:pos srsName="urn:ogc:def:crs:EPSG::4326">52.5 3.0</gml:pos></gml:Point></sams:shape></wml2:MonitoringPoint></om:featureOfInterest><om:result><wml2:MeasurementTimeseries><wml2:defaultPointMetadata><wml2:DefaultTVPMeasurementMetadata><wml2:uom code="mm"/><wml2:interpolationType xlink:href="http://www.opengis.net/def/waterml/2.0/interpolationType/TotalPrec"/></wml2:DefaultTVPMeasurementMetadata></wml2:defaultPointMetadata>${point("12:05", "0.2")}${point("12:10", "0.4")}</wml2:MeasurementTimeseries></om:result></om:OM_Observation></wml2:observationMember></wml2:Collection>`;
  mkdirSync(path.join(place, "tarn"));
  for (const id of ["0043", "0044"]) writeFileSync(path.join(place, "tarn", `rain_${id}.xml`), series(id));
  writeFileSync(path.join(place, "assets.csv"), "id,name,lon,lat\nP1,Pump,3.0,52.5\n");

  const { plan, gaugeFiles } = await planOf(place);
  expect(plan.gauges).toMatchObject([
    { network: "tarn", layout: "waterml2", kind: "increments", stamp: "end" },
  ]);
  expect(plan.gauges[0]!.stations).toBeUndefined();
  expect(gaugeFiles[0]!.stationsFiles).toEqual(gaugeFiles[0]!.files);
  expect(plan.assets).toMatchObject({
    file: "assets.csv",
    columns: { id: "id", name: "name", x: "lon", y: "lat" },
  });
});
