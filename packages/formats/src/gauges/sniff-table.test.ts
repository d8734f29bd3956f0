import { describe, expect, test } from "vitest";
import { scratchFolder } from "../../test/scratch.ts";
import { sniffTable } from "./sniff-table.ts";

const folder = scratchFolder();
let files = 0;

const sniff = (text: string | Uint8Array) => {
  files += 1;
  return sniffTable(folder.write(`table-${files}.csv`, text));
};
const table = (...rows: string[]) => `${rows.join("\n")}\n`;
async function readings(text: string) {
  const guess = await sniff(text);
  if (guess.kind !== "readings") throw new Error(`not readings but ${JSON.stringify(guess)}`);
  return guess.readings;
}
const at = (minutes: number) =>
  new Date(Date.UTC(2031, 4, 3, 12) + minutes * 60_000).toISOString().slice(0, 16);

describe("readings", () => {
  test("long, five-minute increments in UTC", async () => {
    const rows = [0, 5, 10, 15].flatMap((minute) => [
      `007,${at(minute)}Z,${minute === 10 ? 0.4 : 0},G`,
      `NO,${at(minute)}Z,${minute === 5 ? 0.2 : "-999"},S`,
    ]);
    const guess = await readings(table("gauge_id,time,depth_mm,quality", ...rows));
    expect(guess).toMatchObject({
      layout: { value: "long", standing: "guessed" },
      columns: { value: { gauge: "gauge_id", time: "time", value: "depth_mm", quality: "quality" } },
      kind: { value: "increments" },
      unit: { value: "mm", standing: "found" },
      stepMinutes: { value: 5 },
      zone: { value: "UTC", standing: "found" },
      firstEpochMs: Date.UTC(2031, 4, 3, 12),
      lastEpochMs: Date.UTC(2031, 4, 3, 12, 15),
      gaugeIds: ["007", "NO"],
      allGaugesSeen: true,
      missing: { value: ["-999"] },
      qualityCodes: ["G", "S"],
    });
  });

  test("long with ids that are numbers and headers that say nothing", async () => {
    const rows = [0, 10, 20].flatMap((minute) => [`${at(minute)},1420,0.2`, `${at(minute)},1421,0`]);
    const guess = await readings(table("a,b,c", ...rows));
    expect(guess.layout.value).toBe("long");
    expect(guess.columns.value).toEqual({ time: "a", gauge: "b", value: "c" });
    expect(guess.gaugeIds).toEqual(["1420", "1421"]);
    expect(guess.zone).toMatchObject({
      value: undefined,
      standing: "guessed",
      reason: "the stamps name no zone: ask",
    });
    expect(guess.unit).toMatchObject({ value: "mm", standing: "guessed" });
  });

  test("wide, ten minutes, one gauge still silent", async () => {
    const guess = await readings(
      table("Time;007;NO;A 3", ...[0, 10, 20, 30].map((minute) => `${at(minute)}+01:00;0;${minute / 50};`)),
    );
    expect(guess).toMatchObject({
      layout: { value: "wide" },
      stepMinutes: { value: 10 },
      zone: { value: "UTC+01:00", standing: "found" },
      gaugeIds: ["007", "NO", "A 3"],
      allGaugesSeen: true,
      missing: { value: [""] },
    });
    expect(guess.columns.value).toEqual({ time: "Time" });
  });

  test("a level that rises is a counter", async () => {
    const rows = Array.from(
      { length: 12 },
      (_, index) => `A,${at(index * 15)},${(3 + index * 0.2).toFixed(1)}`,
    );
    const guess = await readings(table("station,time,value", ...rows));
    expect(guess.kind).toMatchObject({ value: "counter", reason: "values rise 11 times and fall 0 times" });
  });

  test("equal values at odd times are tips; so are rows without a value", async () => {
    const minutes = [0, 3, 4, 11, 30, 31];
    const withDepth = await readings(
      table("gauge,time,mm", ...minutes.map((minute) => `A,${at(minute)},0.2`)),
    );
    expect(withDepth).toMatchObject({ kind: { value: "tips" }, tipMm: { value: 0.2, standing: "guessed" } });
    expect("stepMinutes" in withDepth).toBe(false);
    const bare = await readings(table("gauge,time", ...minutes.map((minute) => `A,${at(minute)}`)));
    expect(bare).toMatchObject({
      kind: { value: "tips" },
      columns: { value: { gauge: "gauge", time: "time" } },
    });
    expect("tipMm" in bare).toBe(false);
  });

  test.each([
    ["rate_mm/h", "intensity", "mm/h", "found"],
    ["intensity", "intensity", "mm/h", "guessed"],
    ["rain (in)", "increments", "in", "found"],
    ["rain [inches]", "increments", "in", "found"],
    ["tips", "increments", "tips", "found"],
    ["value", "increments", "mm", "guessed"],
  ])("header %s: %s in %s, %s", async (header, kind, unit, standing) => {
    const rows = [3, 1, 0, 2].map((value, index) => `A,${at(index * 5)},${value}`);
    const guess = await readings(table(`gauge,time,${header}`, ...rows));
    expect(guess.kind.value).toBe(kind);
    expect(guess.unit).toMatchObject({ value: unit, standing });
  });

  test("of a long file both ends are looked at, and it says that there may be more gauges", async () => {
    const rows = Array.from(
      { length: 9_000 },
      (_, index) => `G${index % 7},${at(Math.floor(index / 7) * 5)}Z,0.0`,
    );
    const guess = await readings(table("gauge,time,value", ...rows));
    expect(guess.allGaugesSeen).toBe(false);
    expect(guess.gaugeIds).toHaveLength(7);
    expect(guess.firstEpochMs).toBe(Date.UTC(2031, 4, 3, 12));
    expect(guess.lastEpochMs).toBe(Date.UTC(2031, 4, 3, 12) + Math.floor(8_999 / 7) * 300_000);
  });

  test("stamps with the offsets of summer and winter name no zone", async () => {
    const guess = await readings(
      table("gauge,time,value", "A,2031-03-30T01:00+01:00,0", "A,2031-03-30T03:00+02:00,0.2"),
    );
    expect(guess.zone.value).toBeUndefined();
    expect(guess.zone.reason).toContain("different offsets");
  });
});

describe("stations", () => {
  test("degrees", async () => {
    const guess = await sniff(
      table("id,name,lon,lat,elevation_m", "007,Mill,4.1,51.2,3", "NO,Pump,4.2,51.3,", "C,Lock,4.3,51.4,1"),
    );
    expect(guess).toMatchObject({
      kind: "stations",
      delimiter: ",",
      stations: {
        columns: { value: { id: "id", name: "name", x: "lon", y: "lat", elevation: "elevation_m" } },
        crs: { value: "EPSG:4326", standing: "guessed" },
        ids: ["007", "NO", "C"],
      },
    });
  });

  test("metres of a system that is not named", async () => {
    const guess = await sniff(
      table("gauge\tEasting (m)\tNorthing (m)", "A\t450000\t5600000", "B\t451000\t5601000"),
    );
    expect(guess).toMatchObject({
      kind: "stations",
      stations: {
        columns: { value: { id: "gauge", x: "Easting (m)", y: "Northing (m)" } },
        crs: { value: undefined },
      },
    });
  });

  test("readings that carry their coordinates are readings", async () => {
    const rows = [0, 5, 10].flatMap((minute) => [
      `A,4.1,51.2,${at(minute)},0`,
      `B,4.2,51.3,${at(minute)},0.2`,
    ]);
    const guess = await readings(table("gauge,lon,lat,time,rain_mm", ...rows));
    expect(guess.columns.value).toEqual({ gauge: "gauge", time: "time", value: "rain_mm" });
  });
});

describe("neither", () => {
  test.each([
    ["", "the file is empty"],
    ['{"type": "FeatureCollection"}', "it begins like JSON or XML, not like a table"],
    ["one column\n1\n2\n", "no delimiter parts its lines into columns"],
    ["a,b\n", "there is no row under the header"],
    ["a,b\n1,2\n3,4\n", "it has neither a column of times nor two of coordinates"],
    [
      "gauge,time,value\nA,03/05/31 12:05,1\n",
      'the dates in column "time" have years of two digits; write them like 2031-05-03T12:05',
    ],
  ])("%j: %s", async (text, reason) => {
    expect(await sniff(text)).toEqual({ kind: "unknown", reason });
  });

  test("bytes that are no text", async () => {
    expect(await sniff(new Uint8Array([0x89, 0x48, 0x44, 0x46, 0, 1]))).toEqual({
      kind: "unknown",
      reason: "this is not a text file",
    });
  });
});
