import { expect, test } from "vitest";
import type { PolarEcho } from "../polar-echo.ts";
import { RAIN_TYPE } from "../rain-type/steiner.ts";
import { type LayeredRain, roundsOf } from "./layered-rain.ts";
import { layerBelowFreezing, MeltingLayerLearner } from "./melting-layer.ts";
import { ProfileLearner } from "./profile-learner.ts";
import { idealisedProfile, type VerticalProfile } from "./vertical-profile.ts";

const planted: VerticalProfile = {
  bottomM: 1500,
  peakM: 1720,
  topM: 1940,
  peakDb: 7.5,
  slopeAboveDbPerKm: -3.5,
  slopeBelowDbPerKm: 0,
};
const level: VerticalProfile = { ...planted, peakDb: 0, slopeAboveDbPerKm: 0 };

function learn(rounds: readonly (readonly PolarEcho[])[]) {
  const layers = new MeltingLayerLearner();
  const profiles = new ProfileLearner();
  for (const echo of rounds.flat()) {
    layers.add(echo);
    profiles.add(echo);
  }
  const layer = layers.finish();
  return { layer, learned: profiles.finish(layer) };
}

const rain: LayeredRain = { profile: planted, rhohvDrop: 0.07 };

// A beam of 3 degrees is 1 km wide at 20 km: it tells the middle of the layer, hardly its edges.
test.each([
  [0.5, 0.07, 40, 0.5],
  [1, 0.07, 40, 0.5],
  [1, undefined, 60, 0.8],
  [2, 0.07, 80, 1],
  [3, 0.07, 150, 2],
] as const)(
  "a beam of %d degrees, RHOHV falling by %s: middle of the layer within %d m, peak within %d dB",
  (beamWidthDeg, rhohvDrop, withinM, withinDb) => {
    const { layer, learned } = learn(
      roundsOf({ profile: planted, beamWidthDeg, ...(rhohvDrop === undefined ? {} : { rhohvDrop }) }, 3),
    );
    if (layer === undefined || learned.profile === undefined) throw new Error("no layer was found");
    expect(Math.abs((layer.bottomM + layer.topM) / 2 - 1720)).toBeLessThan(withinM);
    expect(learned.basis).toBe("measured");
    expect(Math.abs(learned.profile.peakM - 1720)).toBeLessThan(withinM);
    expect(Math.abs(learned.profile.peakDb - 7.5)).toBeLessThan(withinDb);
    expect(Math.abs(learned.profile.slopeAboveDbPerKm + 3.5)).toBeLessThan(0.5);
    expect(layer.correlation === undefined).toBe(rhohvDrop === undefined);
    if (layer.correlation !== undefined) {
      expect(Math.abs(layer.correlation.inRain - 0.99)).toBeLessThan(0.003);
      expect(Math.abs(layer.correlation.drop - 0.07)).toBeLessThan(0.02);
    }
  },
);

test.each([0, 900])("an antenna at %d m finds the layer at its height above the sea", (antennaHeightM) => {
  const { layer } = learn(roundsOf({ ...rain, antennaHeightM }, 2));
  expect(Math.abs((layer?.bottomM ?? Number.NaN) + (layer?.topM ?? Number.NaN) - 2 * 1720)).toBeLessThan(100);
});

test("rain without a layer in reach teaches nothing", () => {
  const { layer, learned } = learn(
    roundsOf({ profile: { ...planted, bottomM: 9000, peakM: 9250, topM: 9500 }, rhohvDrop: 0.07 }, 2),
  );
  expect(layer).toBeUndefined();
  expect(learned).toMatchObject({ basis: "none", reason: "no melting layer was found within reach" });
  expect(learned.profile).toBeUndefined();
});

// Showers: level up to 2.5 km, weaker above. A fall of echo with height is no bright band.
test("echo that weakens aloft without a peak is no melting layer", () => {
  const shower = { ...planted, bottomM: 2499, peakM: 2499.5, topM: 2500, peakDb: 0, slopeAboveDbPerKm: -3 };
  expect(learn(roundsOf({ profile: shower }, 2)).layer).toBeUndefined();
  expect(learn(roundsOf({ profile: shower, rhohvDrop: 0 }, 2)).layer).toBeUndefined();
});

// Nothing below the layer is seen, so that its peak might as well be echo from the ground.
test("a layer at the antenna itself is not told from echo alone", () => {
  const low = { ...planted, bottomM: -100, peakM: 100, topM: 300 };
  expect(learn(roundsOf({ profile: low }, 2)).layer).toBeUndefined();
});

test("RHOHV that falls with range alone is no melting layer", () => {
  expect(learn(roundsOf({ profile: level, rhohvDrop: 0, rhohvPerKm: 8e-4 }, 2)).layer).toBeUndefined();
});

test("one elevation alone: RHOHV gives the height, common practice the profile", () => {
  const { layer, learned } = learn(roundsOf({ ...rain, elevationsDeg: [3] }, 3));
  if (layer === undefined) throw new Error("no layer was found");
  expect(Math.abs((layer.bottomM + layer.topM) / 2 - 1720)).toBeLessThan(60);
  expect(learned).toMatchObject({
    basis: "idealised",
    profile: idealisedProfile(layer),
    reason: "too few sweeps see the same rain",
  });
});

test("one elevation without RHOHV, or no echo at all, tells nothing", () => {
  expect(learn(roundsOf({ profile: planted, elevationsDeg: [3] }, 2)).layer).toBeUndefined();
  const dry = roundsOf(rain, 1).map((round) => {
    for (const { dbz } of round) dbz.fill(Number.NEGATIVE_INFINITY);
    return round;
  });
  expect(learn(dry).learned.basis).toBe("none");
  expect(learn([]).learned.basis).toBe("none");
});

// Common practice: top of the layer at 0 °C, 0.5 km thick, 6 dB, -4.5 dB/km.
test("a freezing height that the plan gives stands above what the scans say", () => {
  const profiles = new ProfileLearner();
  for (const echo of roundsOf(rain, 2).flat()) profiles.add(echo);
  expect(profiles.finish(layerBelowFreezing(2100))).toMatchObject({
    basis: "idealised",
    profile: {
      bottomM: 1600,
      peakM: 1850,
      topM: 2100,
      peakDb: 6,
      slopeAboveDbPerKm: -4.5,
      slopeBelowDbPerKm: 0,
    },
  });
});

// A rain type may take strong widespread rain for showers; the volume says whether it did.
test.each([
  ["layered rain all through", planted, 1],
  ["level rain in the showers", level, 0],
] as const)(
  "told to be showers, half of the circle, %s: share that follows the profile",
  (_, inShowers, share) => {
    const profiles = new ProfileLearner();
    const showers = roundsOf({ ...rain, profile: inShowers }, 3).flat();
    const half = 90 * 50;
    const types = new Uint8Array(2 * half).fill(RAIN_TYPE.stratiform).fill(RAIN_TYPE.convective, 0, half);
    for (const [k, echo] of roundsOf(rain, 3).flat().entries()) {
      echo.dbz.set((showers[k] as PolarEcho).dbz.subarray(0, half));
      profiles.add(echo, types);
    }
    const layer = { bottomM: 1500, topM: 1940, basis: "scans", uncertaintyM: 50 } as const;
    const learned = profiles.finish(layer);
    expect(learned.basis).toBe("measured");
    expect(Math.abs((learned.convectiveShare ?? Number.NaN) - share)).toBeLessThanOrEqual(0.05);
  },
);

test("what is screened does not teach", () => {
  const rounds = roundsOf(rain, 2);
  const spoilt = roundsOf(rain, 2).map((round) =>
    round.map((echo, k) => {
      // Strong false echo in the lowest sweep, near the antenna and to one side.
      for (let at = 0; at < echo.dbz.length; at++) {
        if (k > 0 || at % 50 > 14 || at > 2500) continue;
        echo.dbz[at] = 45;
        echo.screenedBy[at] = 1;
      }
      return echo;
    }),
  );
  const [clean, after] = [learn(rounds), learn(spoilt)];
  expect(Math.abs((after.layer?.bottomM ?? Number.NaN) - (clean.layer?.bottomM ?? 0))).toBeLessThan(30);
  expect(
    Math.abs((after.learned.profile?.peakDb ?? Number.NaN) - (clean.learned.profile?.peakDb ?? 0)),
  ).toBeLessThan(0.3);
});

test("the same again, in any order within a round, and the same after being cloned", () => {
  const rounds = roundsOf(rain, 2);
  const { learned } = learn(rounds);
  expect(learn(rounds.map((round) => [...round].reverse())).learned).toEqual(learned);
  expect(structuredClone(learned)).toEqual(learned);
});
