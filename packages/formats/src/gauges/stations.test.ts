import { basename } from "node:path";
import type { Notice } from "@rainreckon/core";
import { describe, expect, test } from "vitest";
import { scratchFolder } from "../../test/scratch.ts";
import { sniffTable } from "./sniff-table.ts";
import { readStations, type StationColumns, stationsDuring } from "./stations.ts";

const folder = scratchFolder();
const COLUMNS: StationColumns = { id: "id", name: "name", x: "lon", y: "lat", elevation: "elev" };

async function read(text: string, columns: StationColumns = COLUMNS) {
  const notices: Notice[] = [];
  const stations = await readStations(folder.write("stations.csv", text), columns, (notice) =>
    notices.push(notice),
  );
  return { stations, told: notices.map(({ what, where, fix }) => `${basename(where)}: ${what}; ${fix}`) };
}

test("ids stay text, names and elevations may be absent", async () => {
  const { stations, told } = await read(
    [
      "\ufeffid;name;lon;lat;elev",
      "007;Pump house;4.10;51.20;-2.5",
      "NO;;4.2;51.3;",
      "12:30;Mill;-4e0;+51.4;-9999",
      "",
    ].join("\r\n"),
  );
  expect(stations).toEqual([
    { id: "007", name: "Pump house", x: 4.1, y: 51.2, elevationM: -2.5, line: 2 },
    { id: "NO", x: 4.2, y: 51.3, line: 3 },
    { id: "12:30", name: "Mill", x: -4, y: 51.4, line: 4 },
  ]);
  expect(told).toEqual([]);
});

test("stations without an id or a readable place are left out by line", async () => {
  const { stations, told } = await read(
    [
      "id,name,lon,lat,elev",
      ",Nobody,4.1,51.2,0",
      'A,Comma,"4,1",51.2,0',
      "B,Degrees,4.1,51°12',0",
      "C,Nowhere,4.1,,0",
      "D,High,4.1,51.2,high",
    ].join("\n"),
  );
  expect(stations).toEqual([{ id: "D", name: "High", x: 4.1, y: 51.2, line: 6 }]);
  expect(told).toEqual([
    'stations.csv, line 2: column "id": no id: the station is left out; write id, x and y, with a decimal point',
    'stations.csv, line 3: column "lon": "4,1" has a decimal comma: the station is left out; write id, x and y, with a decimal point',
    'stations.csv, line 4: column "lat": "51°12\'" is no number: the station is left out; write id, x and y, with a decimal point',
    'stations.csv, line 5: column "lat": "" is no number: the station is left out; write id, x and y, with a decimal point',
    'stations.csv, line 6: the elevation "high" is no number: taken as not known; write metres with a decimal point, or leave the cell empty',
  ]);
});

test("of two stations with one id the first counts, and both lines are named", async () => {
  const { stations, told } = await read(
    ["id,name,lon,lat,elev", "A,One,4.1,51.2,0", "A,Two,4.9,51.2,0", "B,Three,4,51,0", "B,Three,4,51,0"].join(
      "\n",
    ),
  );
  expect(stations.map(({ id, name }) => [id, name])).toEqual([
    ["A", "One"],
    ["B", "Three"],
  ]);
  expect(told).toEqual([
    'stations.csv, lines 2 and 3: station "A" is listed twice, at two places: line 2 counts; delete the wrong line',
    'stations.csv, lines 4 and 5: station "B" is listed twice, at the same place: line 4 counts; nothing to do',
  ]);
});

test("a table without a station, or without the column, cannot be read", async () => {
  await expect(read("id,name,lon,lat,elev\nA,One,west,51,0\n")).rejects.toMatchObject({
    what: "no station is left",
  });
  await expect(read("id,lon,lat\nA,4,51\n")).rejects.toMatchObject({
    what: 'there is no column "name"',
    fix: 'name one of "id", "lon", "lat"',
  });
});

test("a short row has no place", async () => {
  const { stations, told } = await read("id,lon,lat\nA,4,51\nB,4\n", { id: "id", x: "lon", y: "lat" });
  expect(stations).toHaveLength(1);
  expect(told[0]).toContain('line 3: column "lat": "" is no number');
});

test("a stray quotation mark is told with what it swallows", async () => {
  const { stations, told } = await read('id,lon,lat\nA,4,51\n"B"x,4,51\nC,4,51\n', {
    id: "id",
    x: "lon",
    y: "lat",
  });
  expect(stations.map(({ id }) => id)).toEqual(["A"]);
  expect(told[0]).toContain(
    "line 3: a quotation mark is not closed, or closed within a cell, and swallows 2 lines",
  );
});

describe("entries that hold for a time", () => {
  const COLUMNS = {
    id: "id",
    x: "lon",
    y: "lat",
    validFrom: "from",
    validTo: "to",
    tipMm: "tip",
    heated: "heated",
    corrections: "corrections",
  };
  const TABLE = [
    "id,lon,lat,from,to,tip,heated,corrections",
    "A,4.1,51.2,2020-01-01,2030-12-31,0.1,no,",
    "A,4.2,51.3,2031-01-01,,0.2,yes,wind",
    "B,4.3,51.2,2031-06-01T12:00Z,,,perhaps,",
  ].join("\n");
  const window = (from: string, to: string) => ({
    startEpochMs: Date.parse(from),
    endEpochMs: Date.parse(to),
  });

  test("a gauge that moved has an entry for each place, with what is known of it", async () => {
    const { stations, told } = await read(TABLE, COLUMNS);
    expect(stations).toEqual([
      {
        id: "A",
        x: 4.1,
        y: 51.2,
        // The last day is one on which the entry still holds.
        validFromEpochMs: Date.parse("2020-01-01T00:00Z"),
        validToEpochMs: Date.parse("2031-01-01T00:00Z"),
        tipMm: 0.1,
        heated: false,
        line: 2,
      },
      {
        id: "A",
        x: 4.2,
        y: 51.3,
        validFromEpochMs: Date.parse("2031-01-01T00:00Z"),
        tipMm: 0.2,
        heated: true,
        corrections: "wind",
        line: 3,
      },
      { id: "B", x: 4.3, y: 51.2, validFromEpochMs: Date.parse("2031-06-01T12:00Z"), line: 4 },
    ]);
    expect(told).toEqual([
      'stations.csv, line 4: "perhaps" is neither yes nor no: taken as not known; write yes or no',
    ]);
  });

  test("the entry that holds at the window counts; one that never does is absent", async () => {
    const { stations } = await read(TABLE, COLUMNS);
    const during = stationsDuring(
      stations,
      window("2031-05-03T00:00Z", "2031-05-04T00:00Z"),
      "stations.csv",
      () => {},
    );
    expect([...during].map(([id, { x }]) => [id, x])).toEqual([["A", 4.2]]);
  });

  test("a gauge that moved within the window stands where it stood longer, and it is said", async () => {
    const { stations } = await read(TABLE, COLUMNS);
    const told: string[] = [];
    const during = stationsDuring(
      stations,
      window("2030-12-30T00:00Z", "2031-01-02T00:00Z"),
      "stations.csv",
      ({ what, where }) => told.push(`${where}: ${what}`),
    );
    expect(during.get("A")?.x).toBe(4.1);
    expect(told).toEqual([
      'stations.csv, lines 2 and 3: station "A" has two entries that hold within the window: the one of line 2 holds longer and counts',
    ]);
  });

  test("entries that hold at the same time are one station listed twice; a date that cannot be read is told", async () => {
    const { stations, told } = await read(
      [
        "id,lon,lat,from,to,tip,heated,corrections",
        "A,4.1,51.2,2020-01-01,2031-02-01,,,",
        "A,4.2,51.3,2031-01-01,,,,",
        "B,4,51,03.05.2031,,,,",
      ].join("\n"),
      COLUMNS,
    );
    expect(stations).toHaveLength(1);
    expect(told).toEqual([
      'stations.csv, lines 2 and 3: station "A" is listed twice, at two places: line 2 counts; delete the wrong line',
      'stations.csv, line 4: the date "03.05.2031" cannot be read (day and month can be mistaken for each other): the station is left out; write it like 2031-05-03',
    ]);
  });

  test("one entry may end on the day on which the next begins", async () => {
    const rows = ["A,4.1,51.2,2020-01-01,2031-01-01,,,", "A,4.2,51.3,2031-01-01,,,,"];
    const { stations, told } = await read([TABLE.split("\n")[0], ...rows].join("\n"), COLUMNS);
    expect(stations).toHaveLength(2);
    expect(told).toEqual([]);
  });

  test("survey sees the columns by their headers, though ids repeat", async () => {
    expect(await sniffTable(folder.write("moved.csv", TABLE))).toMatchObject({
      kind: "stations",
      stations: { columns: { value: COLUMNS } },
    });
  });
});

test("a decimal comma where the table has one", async () => {
  const notices: Notice[] = [];
  const path = folder.write("comma.csv", "id;x;y\nA;4,1;51,2\nB;4.1;51,2\n");
  const stations = await readStations(path, { id: "id", x: "x", y: "y" }, (notice) => notices.push(notice), {
    decimal: "comma",
  });
  expect(stations).toEqual([{ id: "A", x: 4.1, y: 51.2, line: 2 }]);
  expect(notices[0].what).toBe('column "x": "4.1" has a decimal point: the station is left out');
});
