import { expect, test } from "vitest";
import type { SweepHeader } from "./model/radar.ts";
import { dropResent, groupIntoRounds } from "./rounds.ts";
import { dopplerCuts, joinParts } from "./sweep-parts.ts";

function sweep(startS: number, elevationDeg: number, quantities: string, path = quantities): SweepHeader {
  return {
    site: { id: "TEST", lonDeg: 0, latDeg: 0, antennaHeightM: 0 },
    origin: { path, dataset: "sweep 0" },
    elevationDeg,
    rayCount: 360,
    gateCount: 10,
    firstGateCentreM: 500,
    gateLengthM: 1000,
    startEpochMs: startS * 1000,
    endEpochMs: (startS + 20) * 1000,
    quantities: quantities.split(" "),
    remarks: [],
  };
}

const items = (...headers: SweepHeader[]) => headers.map((header) => ({ header }));

test("one moment a file is one sweep, and nothing was sent again", () => {
  const files = items(
    sweep(0, 1.2, "DBZH"),
    sweep(0, 1.2, "ZDR"),
    sweep(0, 1.22, "KDP"),
    sweep(300, 1.2, "DBZH"),
  );
  const { kept, dropped } = dropResent(files, "last");
  expect(dropped).toEqual([]);
  const joined = joinParts(kept);
  expect(joined.map(({ header, parts }) => [header.quantities.join(" "), parts.length])).toEqual([
    ["DBZH KDP ZDR", 3],
    ["DBZH", 1],
  ]);
  expect(
    groupIntoRounds(
      joined.map(({ header }) => header),
      { maxSilenceMs: 1e6 },
    ),
  ).toHaveLength(2);
});

test("a part that was sent again counts once; other parts stay", () => {
  const files = items(sweep(0, 1.2, "DBZH", "a"), sweep(0, 1.2, "ZDR", "b"), sweep(0, 1.2, "DBZH", "c"));
  const { kept, dropped } = dropResent(files, "last");
  expect(kept.map(({ header }) => header.origin.path)).toEqual(["b", "c"]);
  expect(
    dropped.map(({ item, keptInstead }) => [item, keptInstead].map(({ header }) => header.origin.path)),
  ).toEqual([["a", "c"]]);
});

test("other elevations, instants and sites are no parts of one another", () => {
  const other = { ...sweep(0, 0.5, "ZDR"), site: { id: "OTHER", lonDeg: 0, latDeg: 0, antennaHeightM: 0 } };
  const files = items(sweep(0, 0.5, "DBZH"), sweep(0, 1.5, "ZDR"), sweep(1, 0.5, "ZDR"), other);
  expect(joinParts(files)).toHaveLength(4);
});

test("the Doppler cut of a split cut is matched to its surveillance cut", () => {
  const surveillance = sweep(0, 0.5, "DBZH RHOHV ZDR");
  const doppler = sweep(22, 0.5, "DBZH VRADH");
  const next = sweep(44, 1.5, "DBZH RHOHV");
  const nextDoppler = sweep(66, 1.48, "DBZH VRADH");
  const high = sweep(90, 2.4, "DBZH VRADH");
  const pairs = dopplerCuts([nextDoppler, high, doppler, surveillance, next]);
  expect([...pairs]).toEqual([
    [doppler, surveillance],
    [nextDoppler, next],
  ]);
});

test("a surveillance cut alone, a Doppler cut long after, or two of one kind are no split cut", () => {
  expect(dopplerCuts([sweep(0, 0.5, "DBZH"), sweep(300, 0.5, "DBZH VRADH")]).size).toBe(0);
  expect(dopplerCuts([sweep(0, 0.5, "DBZH VRADH"), sweep(21, 0.5, "DBZH VRADH")]).size).toBe(0);
  expect(dopplerCuts([sweep(0, 0.5, "DBZH VRADH"), sweep(21, 0.5, "DBZH")]).size).toBe(0);
  expect(dopplerCuts([sweep(0, 0.5, "ZDR"), sweep(21, 0.5, "DBZH VRADH")]).size).toBe(0);
});
