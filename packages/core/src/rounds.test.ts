import { expect, test } from "vitest";
import type { SweepHeader } from "./model/radar.ts";
import { dropResent, groupIntoRounds, medianRoundMs } from "./rounds.ts";

const MINUTE = 60_000;

/** A sweep of 20 s. */
function sweep(
  startMinute: number,
  elevationDeg: number,
  path = `${startMinute}-${elevationDeg}`,
): SweepHeader {
  const startEpochMs = startMinute * MINUTE;
  return {
    site: { id: "TEST", lonDeg: 0, latDeg: 0, antennaHeightM: 0 },
    origin: { path, dataset: "dataset1" },
    elevationDeg,
    rayCount: 360,
    gateCount: 10,
    firstGateCentreM: 500,
    gateLengthM: 1000,
    startEpochMs,
    endEpochMs: startEpochMs + 20_000,
    quantities: ["DBZH"],
    remarks: [],
  };
}

const elevations = (volumes: ReturnType<typeof groupIntoRounds>) =>
  volumes.map(({ sweeps }) => sweeps.map(({ elevationDeg }) => elevationDeg));

const options = { maxSilenceMs: 4 * MINUTE };

test("an elevation seen again starts a round, whatever the order of the files", () => {
  const sweeps = [sweep(0, 0.5), sweep(1, 1.5), sweep(2, 2.4), sweep(5, 0.5), sweep(6, 1.5), sweep(7, 2.4)];
  const expected = [
    [0.5, 1.5, 2.4],
    [0.5, 1.5, 2.4],
  ];
  expect(elevations(groupIntoRounds(sweeps, options))).toEqual(expected);
  const shuffled = [4, 0, 5, 2, 1, 3].map((index) => sweeps[index] as SweepHeader);
  expect(groupIntoRounds(shuffled, options)).toEqual(groupIntoRounds(sweeps, options));
});

test("antennas that come down start rounds too, and elevations equal within 0.05 degrees", () => {
  const sweeps = [sweep(0, 2.4), sweep(1, 1.5), sweep(2, 0.5), sweep(5, 2.35), sweep(6, 1.52)];
  expect(elevations(groupIntoRounds(sweeps, options))).toEqual([
    [2.4, 1.5, 0.5],
    [2.35, 1.52],
  ]);
  // 0.55 - 0.5 is a little more than 0.05 in binary.
  expect(groupIntoRounds([sweep(0, 0.5), sweep(1, 0.55)], options)).toHaveLength(2);
  expect(groupIntoRounds([sweep(0, 0.5), sweep(1, 0.56)], options)).toHaveLength(1);
});

test("two cuts at one elevation are two instants", () => {
  const volumes = groupIntoRounds([sweep(0, 0.5), sweep(1, 0.5), sweep(2, 1.5)], options);
  expect(elevations(volumes)).toEqual([[0.5], [0.5, 1.5]]);
});

test("a gap starts a round only when it is longer than allowed, from end to start", () => {
  // The first sweep ends at 20 s, so a silence of 4 minutes ends at 4 min 20 s.
  const atLimit = { ...sweep(4, 1.5), startEpochMs: 260_000, endEpochMs: 280_000 };
  const pastLimit = { ...atLimit, startEpochMs: 260_001 };
  expect(groupIntoRounds([sweep(0, 0.5), atLimit], options)).toHaveLength(1);
  expect(groupIntoRounds([sweep(0, 0.5), pastLimit], options)).toHaveLength(2);
});

test("a long sweep that began earlier bridges a silence", () => {
  const long = { ...sweep(0, 0.5), endEpochMs: 10 * MINUTE };
  expect(groupIntoRounds([long, sweep(1, 1.5), sweep(11, 2.4)], options)).toHaveLength(1);
});

test("a round that lacks a sweep is still a round; no sweep is lost or doubled", () => {
  const sweeps = [sweep(0, 0.5), sweep(1, 1.5), sweep(5, 1.5), sweep(10, 0.5), sweep(11, 1.5)];
  const volumes = groupIntoRounds(sweeps, options);
  expect(elevations(volumes)).toEqual([[0.5, 1.5], [1.5], [0.5, 1.5]]);
  expect(volumes.flatMap((volume) => volume.sweeps)).toEqual(sweeps);
});

test("nothing in, nothing out; two sites are a mistake", () => {
  expect(groupIntoRounds([], options)).toEqual([]);
  const other = { ...sweep(1, 1.5), site: { ...sweep(1, 1.5).site, id: "OTHER" } };
  expect(() => groupIntoRounds([sweep(0, 0.5), other], options)).toThrow(RangeError);
});

test("the median round is between the mid-times of lowest sweeps", () => {
  // Lowest sweeps at 0, 5, 10, 16 and 30 min: differences 5, 5, 6, 14; the median is 5.5.
  // Higher sweeps follow them at uneven distances, so that their times would give another median.
  const starts = [0, 5, 10, 16, 30];
  const sweeps = starts.flatMap((start, round) => [
    sweep(start, 0.5),
    sweep(start + [1, 3, 1, 3, 1][round]!, 2.4),
  ]);
  expect(medianRoundMs(groupIntoRounds(sweeps, options))).toBe(5.5 * MINUTE);
  expect(medianRoundMs(groupIntoRounds(sweeps.slice(0, 6), options))).toBe(5 * MINUTE);
  expect(medianRoundMs(groupIntoRounds(sweeps.slice(0, 2), options))).toBeUndefined();
  expect(medianRoundMs([])).toBeUndefined();
});

test("a second cut in the same file is an instant of its own, but no round of the antenna's programme", () => {
  // By hand: low cuts a minute apart in volumes that begin every 5 minutes: 1, 4, 1, 4, 1 minutes between them.
  const sweeps = [0, 5, 10].flatMap((start) => [
    sweep(start, 0.5, `volume-${start}`),
    sweep(start + 1, 0.5, `volume-${start}`),
    sweep(start + 2, 1.5, `volume-${start}`),
  ]);
  const rounds = groupIntoRounds(sweeps, options);
  expect(rounds).toHaveLength(6);
  expect(medianRoundMs(rounds)).toBe(5 * MINUTE);
  // One file of many rounds says nothing of where one ends.
  const inOneFile = [0, 5, 10, 15].map((start) => sweep(start, 0.5, "all"));
  expect(medianRoundMs(groupIntoRounds(inOneFile, options))).toBe(5 * MINUTE);
});

test("a sweep sent twice counts once, and which one does not depend on the order of files", () => {
  const first = { header: sweep(0, 0.5, "a.h5"), contentHash: "1" };
  const again = { header: sweep(0, 0.52, "b.h5"), contentHash: "1" };
  const alone = { header: sweep(5, 0.5, "c.h5"), contentHash: "1" };
  for (const items of [
    [first, again, alone],
    [alone, again, first],
  ]) {
    const { kept, dropped } = dropResent(items, "first");
    expect(kept).toEqual(items.filter((item) => item !== again));
    expect(dropped).toEqual([
      {
        item: again,
        keptInstead: first,
        content: "same",
        reason: "sent again with the same content as a.h5 dataset1",
      },
    ]);
  }
});

test("other content follows the rule and is told apart from content that was not compared", () => {
  const first = { header: sweep(0, 0.5, "a.h5"), contentHash: "1" };
  const corrected = { header: sweep(0, 0.5, "b.h5"), contentHash: "2" };
  const last = dropResent([first, corrected], "last");
  expect(last.kept).toEqual([corrected]);
  expect(last.dropped[0]?.content).toBe("different");
  expect(last.dropped[0]?.reason).toBe("sent again with other content, the last counts: b.h5 dataset1");
  expect(dropResent([first, corrected], "first").kept).toEqual([first]);
  const unknown = { header: sweep(0, 0.5, "d.h5") };
  expect(dropResent([first, unknown], "first").dropped[0]?.content).toBe("not compared");
});

test("other sites, starts and elevations are no repetitions", () => {
  const one = { header: sweep(0, 0.5) };
  const others = [
    { header: sweep(0, 1.5) },
    { header: sweep(1, 0.5) },
    { header: { ...sweep(0, 0.5), site: { ...sweep(0, 0.5).site, id: "OTHER" } } },
  ];
  expect(dropResent([one, ...others], "last")).toEqual({ kept: [one, ...others], dropped: [] });
});
