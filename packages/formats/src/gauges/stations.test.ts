import { basename } from "node:path";
import type { Notice } from "@rainreckon/core";
import { expect, test } from "vitest";
import { scratchFolder } from "../../test/scratch.ts";
import { readStations, type StationColumns } from "./stations.ts";

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
