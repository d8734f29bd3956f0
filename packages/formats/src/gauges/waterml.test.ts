import { basename } from "node:path";
import type { Notice } from "@rainreckon/core";
import { describe, expect, test } from "vitest";
import { scratchFolder } from "../../test/scratch.ts";
import type { GaugeFileSpec } from "./gauge-file-spec.ts";
import { readGaugeFile } from "./read-gauge-files.ts";
import { sniffTable } from "./sniff-table.ts";
import { readStations } from "./stations.ts";

/*
 * Documents as OGC 10-126r4 lays them out (element names and order from memory of its schemas); places and
 * depths are invented.
 */
const folder = scratchFolder();
let files = 0;

const SPEC: GaugeFileSpec = {
  network: "moor",
  layout: "waterml2",
  columns: {},
  kind: "increments",
  unit: "mm",
  stamp: "end",
  zone: "UTC",
  dst: "follow",
  silence: "missing",
  missing: [],
};
const NAMESPACES =
  'xmlns:wml2="http://www.opengis.net/waterml/2.0" xmlns:om="http://www.opengis.net/om/2.0" xmlns:gml="http://www.opengis.net/gml/3.2" xmlns:sams="http://www.opengis.net/samplingSpatial/2.0" xmlns:xlink="http://www.w3.org/1999/xlink" xmlns:xsi="http://www.w3.org/2001/XMLSchema-instance" xmlns:swe="http://www.opengis.net/swe/2.0"';
const TYPE = "http://www.opengis.net/def/waterml/2.0/interpolationType/";

const point = (time: string, value: string, metadata = "") =>
  `<wml2:point><wml2:MeasurementTVP><wml2:time>${time}</wml2:time>${value}${
    metadata === ""
      ? ""
      : `<wml2:metadata><wml2:TVPMeasurementMetadata>${metadata}</wml2:TVPMeasurementMetadata></wml2:metadata>`
  }</wml2:MeasurementTVP></wml2:point>`;
const value = (text: string) => `<wml2:value>${text}</wml2:value>`;
const monitoringPoint = (id: string, pos: string, srs = "urn:ogc:def:crs:EPSG::4326") =>
  `<wml2:MonitoringPoint gml:id="mp.${id}"><gml:identifier codeSpace="https://example.org/">${id}</gml:identifier><gml:name>Mill ${id}</gml:name><sams:shape><gml:Point gml:id="p.${id}"><gml:pos srsName="${srs}">${pos}</gml:pos></gml:Point></sams:shape></wml2:MonitoringPoint>`;
const observation = (
  feature: string,
  points: string,
  { uom = "mm", type = `${TYPE}TotalPrec`, property = "Rainfall" } = {},
) =>
  `<wml2:observationMember><om:OM_Observation><om:observedProperty xlink:title="${property}"/><om:featureOfInterest${feature}<om:result><wml2:MeasurementTimeseries gml:id="s"><wml2:defaultPointMetadata><wml2:DefaultTVPMeasurementMetadata><wml2:uom code="${uom}"/>${
    type === "" ? "" : `<wml2:interpolationType xlink:href="${type}"/>`
  }</wml2:DefaultTVPMeasurementMetadata></wml2:defaultPointMetadata>${points}</wml2:MeasurementTimeseries></om:result></om:OM_Observation></wml2:observationMember>`;
const inline = (id: string, pos: string, srs?: string) =>
  `>${monitoringPoint(id, pos, srs)}</om:featureOfInterest>`;
const collection = (content: string, prolog = '<?xml version="1.0" encoding="UTF-8"?>\n') =>
  `${prolog}<wml2:Collection ${NAMESPACES}>${content}</wml2:Collection>`;

function write(text: string | Uint8Array): string {
  files += 1;
  return folder.write(`series-${files}.xml`, text);
}
async function read(text: string | Uint8Array, spec: Partial<GaugeFileSpec> = {}) {
  const notices: Notice[] = [];
  const { series, counts } = await readGaugeFile(write(text), { ...SPEC, ...spec }, (notice) =>
    notices.push(notice),
  );
  const told = notices.map(({ what, where, fix }) => `${basename(where)}: ${what}; ${fix}`);
  return { series, counts, told };
}

const TWO = point("2031-05-27T12:05:00Z", value("0.2")) + point("2031-05-27T12:10:00Z", value("1.4"));
const at = (clock: string) => Date.parse(`2031-05-27T${clock}Z`);

describe("series", () => {
  test("several in one file, each a gauge; a preceding total ends at its stamp", async () => {
    const { series, told } = await read(
      collection(observation(inline("0042", "51.2 9.1"), TWO) + observation(inline("0043", "51.3 9.2"), TWO)),
    );
    expect(told).toEqual([]);
    expect(series.map(({ id }) => id)).toEqual(["0042", "0043"]);
    expect([...series[0].depthMm]).toEqual([0.2, 1.4]);
    expect([...series[0].startEpochMs]).toEqual([at("12:00"), at("12:05")]);
    expect([...series[0].endEpochMs]).toEqual([at("12:05"), at("12:10")]);
  });

  test("a feature that is described elsewhere in the file, or not at all", async () => {
    const { series } = await read(
      collection(
        observation(' xlink:href="#mp.0042"/>', TWO) +
          observation(' xlink:href="https://example.org/points/0099"/>', TWO) +
          `<wml2:samplingFeatureMember>${monitoringPoint("0042", "51.2 9.1")}</wml2:samplingFeatureMember>`,
      ),
    );
    expect(series.map(({ id }) => id)).toEqual(["0042", "0099"]);
  });

  test("nil values are missing, below detection is 0, and both are counted", async () => {
    const nil = '<wml2:value xsi:nil="true"/>';
    const { series, counts } = await read(
      collection(
        observation(
          inline("A", "51 9"),
          point(
            "2031-05-27T12:05:00Z",
            nil,
            '<wml2:nilReason xlink:href="http://www.opengis.net/def/nil/OGC/0/missing"/>',
          ) +
            point(
              "2031-05-27T12:10:00Z",
              nil,
              '<wml2:nilReason xlink:href="http://www.opengis.net/def/nil/OGC/0/BelowDetectionRange"/>',
            ) +
            point("2031-05-27T12:15:00Z", nil) +
            point(
              "2031-05-27T12:20:00Z",
              value("0.6"),
              "<wml2:qualifier><swe:Category><swe:value>7</swe:value></swe:Category></wml2:qualifier>",
            ) +
            point("2031-05-27T12:25:00Z", value("")),
        ),
      ),
    );
    expect([...series[0].depthMm]).toEqual([Number.NaN, 0, Number.NaN, 0.6, Number.NaN]);
    expect(counts).toMatchObject({ missing: 2, belowDetection: 1, values: 2, unreadableValues: 1 });
  });

  test("inches and rates by the file's own unit", async () => {
    const inch = await read(collection(observation(inline("A", "51 9"), TWO, { uom: "[in_i]" })));
    expect(inch.series[0].depthMm[1]).toBeCloseTo(1.4 * 25.4, 12);
    const rate = await read(
      collection(observation(inline("A", "51 9"), TWO, { uom: "mm/h", type: `${TYPE}AverageSucc` })),
      { kind: "intensity", unit: "mm/h", stamp: "start" },
    );
    expect([...rate.series[0].startEpochMs]).toEqual([at("12:05"), at("12:10")]);
    // 1.4 mm/h for five minutes.
    expect(rate.series[0].depthMm[1]).toBeCloseTo(1.4 / 12, 12);
  });

  test("what does not fit the plan, and what is no rain, is left out by name", async () => {
    const { series, told, counts } = await read(
      collection(
        observation(inline("A", "51 9"), TWO) +
          observation(inline("B", "51 9"), TWO, { type: `${TYPE}TotalSucc` }) +
          observation(inline("C", "51 9"), TWO, { type: `${TYPE}Continuous` }) +
          observation(inline("D", "51 9"), TWO, { uom: "m3/s" }) +
          observation(inline("E", "51 9"), TWO, { property: "Potential evapotranspiration" }),
      ),
    );
    expect(series.map(({ id }) => id)).toEqual(["A"]);
    expect(counts.malformedRows).toBe(8);
    expect(
      told.map((line) => /the series of "(.)" (.*?):? left out|the series of "(.)" ([^;]*)/.exec(line)?.[0]),
    ).toEqual([
      expect.stringContaining('"B" holds values of the type succeeding-total, where stamp: end'),
      expect.stringContaining('"C" holds values of the type other'),
      expect.stringContaining('"D" is in "m3/s"'),
      expect.stringContaining('"E" observes "Potential evapotranspiration"'),
    ]);
  });

  test("stamps without an offset are in the plan's zone; others are taken at their word", async () => {
    const points = point("2031-05-27T12:05:00", value("1")) + point("2031-05-27T12:10:00+02:00", value("2"));
    const { series, told } = await read(collection(observation(inline("A", "51 9"), points)), {
      zone: "UTC+02:00",
    });
    expect([...series[0].endEpochMs]).toEqual([at("10:05"), at("10:10")]);
    expect(told).toEqual([]);
  });

  test("UTF-16 and Latin-1 by the XML declaration", async () => {
    const text = (encoding: string) =>
      collection(observation(inline("Mühle", "51 9"), TWO), `<?xml version="1.0" encoding="${encoding}"?>`);
    expect((await read(Buffer.from(text("ISO-8859-1"), "latin1"))).series[0].id).toBe("Mühle");
    expect((await read(Buffer.from(`\ufeff${text("UTF-16")}`, "utf16le"))).series[0].id).toBe("Mühle");
    await expect(read(text("EBCDIC-INT"))).rejects.toMatchObject({
      what: 'the encoding "EBCDIC-INT" is not read',
    });
    await expect(read(Buffer.from(text("UTF-8"), "latin1"))).rejects.toMatchObject({
      what: "there are bytes that are not utf-8",
    });
  });
});

describe("positions", () => {
  test.each([
    ["urn:ogc:def:crs:EPSG::4326", "51.2 9.1", [9.1, 51.2]],
    ["http://www.opengis.net/def/crs/EPSG/0/4258", "51.2 9.1", [9.1, 51.2]],
    ["urn:ogc:def:crs:OGC:1.3:CRS84", "9.1 51.2", [9.1, 51.2]],
  ])("%s %s", async (srs, pos, lonLat) => {
    const path = write(collection(observation(inline("A", pos, srs), TWO)));
    const [station] = await readStations(path, { id: "id", x: "x", y: "y" }, () => {});
    expect(station).toMatchObject({ id: "A", name: "Mill A", x: lonLat[0], y: lonLat[1] });
  });

  test("a system that is not told apart here gives no place", async () => {
    const path = write(
      collection(observation(inline("A", "5672085 513973", "urn:ogc:def:crs:EPSG::25832"), TWO)),
    );
    await expect(readStations(path, { id: "id", x: "x", y: "y" }, () => {})).rejects.toMatchObject({
      what: "no point has a position",
    });
  });
});

test("survey says what the series say of themselves", async () => {
  const path = write(
    collection(observation(inline("A", "51 9"), TWO, { type: `${TYPE}TotalSucc`, uom: "[in_i]" })),
  );
  expect(await sniffTable(path)).toMatchObject({
    kind: "readings",
    readings: {
      layout: { value: "waterml2", standing: "found" },
      kind: { value: "increments", standing: "found" },
      unit: { value: "in", standing: "found" },
      stamp: { value: "start", standing: "found" },
      zone: { value: "UTC", standing: "found" },
      stepMinutes: { value: 5 },
      gaugeIds: ["A"],
      firstEpochMs: at("12:05"),
    },
  });
});

describe("files that are refused, with line and column", () => {
  const good = collection(observation(inline("A", "51 9"), TWO));
  const bomb = `<?xml version="1.0"?>\n<!DOCTYPE wml2:Collection [<!ENTITY a "ha"><!ENTITY b "&a;&a;&a;">]>\n`;

  test.each([
    [
      "a document type with entities that unfold",
      collection(observation(inline("A", "51 9"), TWO), bomb),
      /declares a document type/,
      /line 2/,
    ],
    [
      "an entity of its own",
      good.replace("Mill A", "&mill;"),
      /not well-formed XML: undefined entity/,
      /line 2/,
    ],
    ["a file cut short", good.slice(0, -40), /not well-formed XML/, /line 2/],
    ["nesting without end", collection("<gml:a>".repeat(200)), /nested more than 100 deep/, /line 2/],
    ["no series", collection(""), /no measurement series/, /xml$/],
    [
      "another document",
      '<a xmlns="http://www.opengis.net/waterml/2.0x"/>',
      /does not know WaterML 2.0/,
      /line 1/,
    ],
    [
      "a series of no place",
      collection(observation("/>", TWO)),
      /does not say at which monitoring point/,
      /line 2/,
    ],
    [
      "two units in one series",
      good.replace(
        "<wml2:value>1.4</wml2:value>",
        `${value("1.4")}<wml2:metadata><wml2:TVPMeasurementMetadata><wml2:uom code="cm"/></wml2:TVPMeasurementMetadata></wml2:metadata>`,
      ),
      /units or interpolation types change/,
      /line 2/,
    ],
  ])("%s", async (_name, text, what, where) => {
    await expect(read(text)).rejects.toMatchObject({
      what: expect.stringMatching(what),
      where: expect.stringMatching(where),
    });
  });
});
