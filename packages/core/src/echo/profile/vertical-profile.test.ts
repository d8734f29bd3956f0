import { type CheckValue, inputNumber, runReferenceSuite } from "@rainreckon/test-data/published";
import { describe, expect, test } from "vitest";
import { beamHeightM, effectiveRadiusM } from "../../beam.ts";
import {
  beamProfileDb,
  beamSigmaM,
  idealisedProfile,
  layerShares,
  profileDb,
  USUAL_PROFILE,
  type VerticalProfile,
} from "./vertical-profile.ts";

function profileOf(entry: CheckValue): VerticalProfile {
  return {
    bottomM: 1000 * inputNumber(entry, "melting_bottom_km"),
    peakM: 1000 * inputNumber(entry, "peak_height_km"),
    topM: 1000 * inputNumber(entry, "melting_top_km"),
    peakDb: inputNumber(entry, "peak_dB"),
    slopeAboveDbPerKm: inputNumber(entry, "slope_above_dB_per_km"),
    slopeBelowDbPerKm: inputNumber(entry, "slope_below_dB_per_km"),
  };
}

/** From the geometry, not from the height and sigma that the entry repeats. */
function beamAverage(entry: CheckValue): number {
  const rangeM = 1000 * inputNumber(entry, "slant_range_km");
  const centreM = beamHeightM(rangeM, inputNumber(entry, "elevation_deg"), effectiveRadiusM());
  return beamProfileDb(profileOf(entry), centreM, beamSigmaM(rangeM, inputNumber(entry, "beamwidth_deg")));
}

runReferenceSuite({
  topics: ["h-vertical-profile"],
  adapters: [
    ["vpr-point-*", (entry) => profileDb(profileOf(entry), 1000 * inputNumber(entry, "height_km"))],
    ["vpr-corr-*", (entry) => -profileDb(profileOf(entry), 1000 * inputNumber(entry, "height_km"))],
    ["vpr-beam-*", beamAverage],
    [
      "vpr-slope-beam-bias",
      (entry) => {
        const slope = inputNumber(entry, "slope_dB_per_km");
        const uniform = {
          bottomM: 0,
          peakM: 0,
          topM: 0,
          peakDb: 0,
          slopeAboveDbPerKm: slope,
          slopeBelowDbPerKm: slope,
        };
        return beamProfileDb(uniform, 0, 1000 * inputNumber(entry, "sigma_km"));
      },
    ],
    ["vpr-typ-ml-thickness", () => USUAL_PROFILE.thicknessM.value / 1000],
    ["vpr-typ-bb-excess", () => USUAL_PROFILE.peakDb.value],
    ["vpr-typ-slope-above", () => USUAL_PROFILE.slopeAboveDbPerKm.value],
    [
      "vpr-typ-peak-below-0C",
      () => {
        const { topM, peakM } = idealisedProfile({ bottomM: 2000, topM: 2500 });
        return (topM - peakM) / 1000;
      },
    ],
  ],
});

describe("a beam over a profile", () => {
  const profile: VerticalProfile = {
    bottomM: 1600,
    peakM: 1800,
    topM: 2100,
    peakDb: 7,
    slopeAboveDbPerKm: -3,
    slopeBelowDbPerKm: -0.5,
  };

  /** The definition, by the midpoint rule over nine sigmas each way. */
  function summed(centreM: number, sigmaM: number, groundM: number): number {
    const steps = 200_000;
    let sum = 0;
    let weights = 0;
    for (let i = 0; i < steps; i++) {
      const t = ((i + 0.5) / steps) * 18 - 9;
      const heightM = centreM + t * sigmaM;
      if (heightM < groundM) continue;
      const weight = Math.exp((-t * t) / 2);
      weights += weight;
      sum += weight * 10 ** (profileDb(profile, heightM) / 10);
    }
    return 10 * Math.log10(sum / weights);
  }

  // Beams of 0.5, 1 and 3 degrees at 30 to 100 km, low, within, above; with and without ground.
  test.each([
    [400, 80, -Infinity],
    [1750, 80, -Infinity],
    [2600, 260, -Infinity],
    [1900, 1570, -Infinity],
    [900, 520, 0],
    [3500, 1570, 150],
  ])("centre %d m, sigma %d m, ground %d m: as the integral has it", (centreM, sigmaM, groundM) => {
    expect(beamProfileDb(profile, centreM, sigmaM, groundM)).toBeCloseTo(summed(centreM, sigmaM, groundM), 3);
  });

  test("a beam without width sees the centre, a very narrow one nearly", () => {
    for (const heightM of [200, 1600, 1700, 1950, 2100, 4000]) {
      expect(beamProfileDb(profile, heightM, 0)).toBe(profileDb(profile, heightM));
      expect(Math.abs(beamProfileDb(profile, heightM, 0.01) - profileDb(profile, heightM))).toBeLessThan(
        1e-3,
      );
    }
  });

  test("neither a thin layer nor a far beam overflows", () => {
    const thin = { ...profile, bottomM: 1799, topM: 1801 };
    for (const centreM of [-20_000, 0, 1800, 30_000]) {
      expect(Number.isFinite(beamProfileDb(thin, centreM, 900))).toBe(true);
    }
  });

  test("shares make one, and stand where the beam does", () => {
    const { rain, melting, snow } = layerShares(profile, 1850, 300);
    expect(rain + melting + snow).toBeCloseTo(1, 12);
    // Normal distribution function at 5/6 sigma on either side: 0.7977, from any table.
    expect(rain).toBeCloseTo(1 - 0.79767, 4);
    expect(layerShares(profile, 1000, 0)).toEqual({ rain: 1, melting: 0, snow: 0 });
    expect(layerShares(profile, 2100, 0)).toEqual({ rain: 0, melting: 0, snow: 1 });
  });

  // Half of the weight of a beam that grazes the ground is lost; what is left is all rain.
  test("the ground takes its share of the beam", () => {
    expect(layerShares(profile, 0, 200, 0).rain).toBeCloseTo(1, 12);
  });
});
