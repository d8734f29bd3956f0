import { describe, expect, test } from "vitest";
import { marshallPalmerSpectrum, normalisedSpectrum } from "../../drop-sizes.ts";
import { echoOf, noiseOf } from "../blockage/echo-fixture.ts";
import { ConsistencyLearner } from "./consistency-learner.ts";
import { DROP_SHAPES, oblateEcho, phaseOfEcho, ZDR_STEP_DB } from "./drop-phase.ts";
import { proposeCalibration } from "./propose-calibration.ts";

const S_BAND_M = 299_792_458 / 2.8e9;

describe("oblate drops", () => {
  // Marshall-Palmer spectra at 2.8 GHz, axis ratio 1.03 - 0.062 D, Rayleigh-Gans; computed independently (scipy).
  test.each([
    [10, 0.244],
    [25, 0.692],
    [50, 1.509],
    [100, 3.26],
  ])("a nominal rain of %d mm/h makes a KDP of %d deg/km at S band", (rate, kdp) => {
    const spectrum = marshallPalmerSpectrum(rate);
    expect(Math.abs(oblateEcho(spectrum, S_BAND_M).kdpDegPerKm / kdp - 1)).toBeLessThan(0.01);
  });

  test("twice the drops make twice Z and KDP, and the same ZDR; tiny drops are spheres", () => {
    const one = oblateEcho(normalisedSpectrum(4000, 2, 1.5), S_BAND_M);
    const two = oblateEcho(normalisedSpectrum(8000, 2, 1.5), S_BAND_M);
    expect(two.kdpDegPerKm / one.kdpDegPerKm).toBeCloseTo(2, 9);
    expect(two.zMm6PerM3 / one.zMm6PerM3).toBeCloseTo(2, 9);
    expect(two.zdrDb).toBeCloseTo(one.zdrDb, 9);
    // At 0.4 mm the axis ratio is held at 1: ZDR 0, no phase, and Z of the sixth moment, which is what |K|2 is for.
    const drizzle = normalisedSpectrum(8000, 4, 0.2);
    expect(oblateEcho(drizzle, S_BAND_M).zdrDb).toBeLessThan(0.01);
  });

  test("KDP over Z falls as ZDR rises, and goes with the frequency", () => {
    const [s, c] = [phaseOfEcho(S_BAND_M), phaseOfEcho(S_BAND_M / 2)];
    const at = (zdrDb: number) => Math.round(zdrDb / ZDR_STEP_DB);
    expect(s.kdpOfZ[at(1)]! / s.kdpOfZ[at(2)]!).toBeGreaterThan(1.5);
    // Rayleigh-Gans: KDP is proportional to the frequency but for the permittivity, which hardly changes.
    expect(c.kdpOfZ[at(1.5)]! / s.kdpOfZ[at(1.5)]!).toBeCloseTo(2, 1);
  });
});

describe("shapes of drops", () => {
  // Axis ratios as the papers' formulas give them, by hand: at 2 and 4 mm.
  test.each([
    ["pruppacherBeard", 0.906, 0.782],
    ["beardChuang", 0.92758, 0.77935],
    ["andsager", 0.9419, 0.7894],
    ["brandes", 0.938, 0.78807],
  ] as const)("%s", (name, at2Mm, at4Mm) => {
    expect(DROP_SHAPES[name](2)).toBeCloseTo(at2Mm, 3);
    expect(DROP_SHAPES[name](4)).toBeCloseTo(at4Mm, 3);
  });

  // Worked out independently with numpy (same scattering, own code): dB below the first shape, mean over mu of 0 to 4.
  test.each([
    [1.2, [0, -1.82, -3.01, -2.75]],
    [1.5, [0, -1.38, -2.44, -2.17]],
    [2, [0, -0.81, -1.66, -1.46]],
  ])("at a ZDR of %d dB they have KDP over Z apart by what the interval is made of", (zdrDb, expected) => {
    const at = Math.round(zdrDb / ZDR_STEP_DB);
    const db = Object.values(DROP_SHAPES).map(
      (shape) => 10 * Math.log10(phaseOfEcho(S_BAND_M, shape).kdpOfZ[at]!),
    );
    db.forEach((value, k) => {
      expect(Math.abs(value - db[0]! - expected[k]!)).toBeLessThan(0.1);
    });
  });
});

/** Rain of one spectrum along 30 km in some rays, seen at S band with an error in Z. */
function learnedError(
  errorDb: number,
  over: { readonly rounds?: number; readonly wavelengthM?: number | undefined; readonly dry?: boolean } = {},
) {
  const { rounds = 8, wavelengthM = S_BAND_M } = over;
  const spectrum = normalisedSpectrum(8000, 2, 1.9);
  const { zMm6PerM3, zdrDb, kdpDegPerKm } = oblateEcho(spectrum, S_BAND_M);
  const noise = noiseOf(11);
  const learner = new ConsistencyLearner();
  let counted = true;
  for (let round = 0; round < rounds; round++) {
    const rainAt = (ray: number) => 3 + ((ray + round) % 3);
    counted &&= learner.add(
      echoOf({
        elevationDeg: 0.5,
        rayCount: 60,
        gateCount: 30,
        startEpochMs: round * 300_000,
        ...("wavelengthM" in over && over.wavelengthM === undefined ? {} : { wavelengthM }),
        dbz: (ray, gate) =>
          over.dry === true || gate < rainAt(ray)
            ? Number.NEGATIVE_INFINITY
            : 10 * Math.log10(zMm6PerM3) + errorDb + 0.7 * noise(),
        zdrDb: () => zdrDb + 0.2 * noise(),
        rhohv: () => 0.99,
        // Across the fold of 180 degrees; two-way.
        phidpDeg: (ray, gate) =>
          (170 + 2 * kdpDegPerKm * Math.max(0, gate + 0.5 - rainAt(ray)) + 1.5 * noise()) % 180,
      }),
    );
  }
  return { counted, found: learner.finish() };
}

describe("consistency of Z, ZDR and PHIDP", () => {
  test.each([-2, 0, 2])("an error of %d dB is found", (errorDb) => {
    const { found } = learnedError(errorDb);
    expect(Math.abs(found!.valueDb - errorDb)).toBeLessThan(0.5);
    expect(found!.standardErrorDb).toBeLessThan(0.4);
  });

  test("no rain, few rounds, or no known wavelength: no word", () => {
    expect(learnedError(0, { dry: true }).found).toBeUndefined();
    expect(learnedError(0, { rounds: 3 }).found).toBeUndefined();
    const unknown = learnedError(0, { wavelengthM: undefined });
    expect([unknown.counted, unknown.found]).toEqual([false, undefined]);
  });
});

describe("what is proposed", () => {
  const sure = (valueDb: number) => ({ valueDb, standardErrorDb: 0.1 });

  test("two radars 2 dB apart: the one that is off is named, and the other is left alone", () => {
    const [s, c] = proposeCalibration(
      [
        { siteId: "s", consistency: sure(2.1) },
        { siteId: "c", consistency: { valueDb: -0.1, standardErrorDb: 0.3 } },
      ],
      [{ oneSiteId: "s", otherSiteId: "c", valueDb: 2, standardErrorDb: 0.2, sampleCount: 500 }],
    );
    expect(s!.offsetDb).toBeCloseTo(-2, 0);
    expect(s!.reason).toMatch(/reads 2\.\d dB too high/);
    expect(c!.offsetDb).toBeUndefined();
    expect(c!.words.map(({ source }) => source)).toEqual(["consistency", "overlap"]);
    expect(c!.words[1]).toMatchObject({ relativeTo: "s", valueDb: -2 });
  });

  test("by hand: one radar with one source has its value and the errors of it", () => {
    const [one] = proposeCalibration([{ siteId: "a", consistency: sure(2) }], []);
    // Errors of 0.1, 0.4 and 1 dB make a variance of 1.17; 6 dB of what is thinkable one of 36.
    const expected = 2 / 1.17 / (1 / 1.17 + 1 / 36);
    expect(one!.errorDb).toBeCloseTo(expected, 6);
    expect(one!.highDb - one!.errorDb).toBeCloseTo(1.96 / Math.sqrt(1 / 1.17 + 1 / 36), 6);
    // 1.9 ± 2.1 dB may be the shape of drops; 3 dB and more is none's.
    expect(one!.offsetDb).toBeUndefined();
    expect(proposeCalibration([{ siteId: "a", consistency: sure(3) }], [])[0]!.offsetDb).toBeCloseTo(-2.9, 1);
  });

  test.each([1.8, -1.8])(
    "two radars that are both %d dB off may have met drops of another shape",
    (errorDb) => {
      const both = proposeCalibration(
        [
          { siteId: "s", consistency: sure(errorDb) },
          { siteId: "c", consistency: sure(1.1 * errorDb) },
        ],
        [{ oneSiteId: "s", otherSiteId: "c", valueDb: 0, standardErrorDb: 0.2, sampleCount: 500 }],
      );
      expect(both.map(({ offsetDb }) => offsetDb)).toEqual([undefined, undefined]);
      expect(both[0]!.reason).toMatch(/may read true: -?1\.[789]/);
    },
  );

  test("two radars that differ, and are off by the same either way: neither is named", () => {
    const both = proposeCalibration(
      [
        { siteId: "s", consistency: sure(1) },
        { siteId: "c", consistency: sure(-1) },
      ],
      [{ oneSiteId: "s", otherSiteId: "c", valueDb: 2, standardErrorDb: 0.2, sampleCount: 500 }],
    );
    expect(both.map(({ offsetDb }) => offsetDb)).toEqual([undefined, undefined]);
  });

  test("sources that contradict each other make the interval wider", () => {
    const by = (differenceDb: number) =>
      proposeCalibration(
        [
          { siteId: "a", consistency: sure(-2) },
          { siteId: "b", consistency: sure(0) },
        ],
        [{ oneSiteId: "a", otherSiteId: "b", valueDb: differenceDb, standardErrorDb: 0.2, sampleCount: 500 }],
      )[0]!;
    const [agreed, torn] = [by(-2), by(2)];
    expect(agreed.offsetDb).toBeCloseTo(2, 0);
    // By hand: 4 dB apart, errors of 0.412, 0.412 and 0.2 dB make 0.617 dB: 6.5 times as much as they allow.
    const ratio = (torn.highDb - torn.lowDb) / (agreed.highDb - agreed.lowDb);
    expect(Math.abs(ratio - 6.5)).toBeLessThan(0.2);
    expect(torn.offsetDb).toBeUndefined();
  });

  test("a radar without ZDR has its level from its neighbour", () => {
    const [, plain] = proposeCalibration(
      [{ siteId: "a", consistency: sure(0) }, { siteId: "b" }],
      [{ oneSiteId: "a", otherSiteId: "b", valueDb: 3, standardErrorDb: 0.2, sampleCount: 500 }],
    );
    expect(plain!.offsetDb).toBeCloseTo(2.9, 0);
  });

  test("gauges alone: drops of unusual size are no calibration, a gross error is", () => {
    const by = (ratioDb: number) =>
      proposeCalibration(
        [{ siteId: "a", gauges: { ratioDb, standardErrorDb: 0.3, exponentB: 1.6 } }],
        [],
      )[0]!;
    // 2 dB of rain are 3.2 dB of Z.
    expect(by(-2).words[0]!.valueDb).toBeCloseTo(3.2, 9);
    expect(by(-2).offsetDb).toBeUndefined();
    expect(by(4).offsetDb).toBeGreaterThan(4);
    expect(by(4).reason).toMatch(/too low/);
  });

  test("an overlap alone does not say which of the two is off", () => {
    const proposals = proposeCalibration(
      [{ siteId: "a" }, { siteId: "b" }],
      [{ oneSiteId: "a", otherSiteId: "b", valueDb: 3, standardErrorDb: 0.2, sampleCount: 500 }],
    );
    expect(proposals.map(({ offsetDb }) => offsetDb)).toEqual([undefined, undefined]);
    expect(proposals[0]!.reason).toMatch(/may read true/);
  });

  test("nothing known, a small error, no radars", () => {
    const [none, small] = proposeCalibration([{ siteId: "a" }, { siteId: "b", consistency: sure(0.4) }], []);
    expect(none!.errorDb).toBeNaN();
    expect(none!.reason).toMatch(/nothing tells/);
    expect(small!.offsetDb).toBeUndefined();
    expect(proposeCalibration([], [])).toEqual([]);
    expect(structuredClone([none, small])).toEqual([none, small]);
  });
});
