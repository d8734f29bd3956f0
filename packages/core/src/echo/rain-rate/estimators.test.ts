import {
  type CheckValue,
  inputNumber,
  inputNumbers,
  runReferenceSuite,
} from "@rainreckon/test-data/published";
import { describe, expect, test } from "vitest";
import { ratioFromDecibels, wavelengthM } from "../../units.ts";
import { zrRelation } from "../../zr-relation.ts";
import { SlopeOfPhase } from "../attenuation/specific-phase.ts";
import {
  bandLaws,
  bringiKdpLaw,
  CIFELLI_2011_KDP,
  CIFELLI_2011_Z_ZDR,
  kdpLaw,
  type MEAN_Z_ZDR,
  RYZHKOV_2005_KDP,
  RYZHKOV_2005_KDP_ZDR,
  RYZHKOV_2005_Z_ZDR,
  RYZHKOV_2014_S_10C,
  rateOfAttenuation,
  rateOfKdp,
  rateOfKdpZdr,
  rateOfZZdr,
} from "./estimators.ts";
import { rateOfZ, readyRelation } from "./ready-relation.ts";

const GHZ = { S: 2.8, C: 5.6, X: 9.4 } as const;

function lawsOf(band: keyof typeof GHZ) {
  const laws = bandLaws(wavelengthM(1e9 * GHZ[band]));
  if (laws === undefined) throw new Error(`no laws for ${band} band`);
  return laws;
}

/** Band letter of an id such as "bc-zzdr-C-…". */
function bandOfId({ id }: CheckValue): keyof typeof GHZ {
  const letter = /-([SCX])-/.exec(id)?.[1];
  if (letter !== "S" && letter !== "C" && letter !== "X") throw new Error(`${id} names no band`);
  return letter;
}

const kdpOf = (entry: CheckValue) => inputNumber(entry, "KDP_deg_per_km");
const zdrOf = (entry: CheckValue) => inputNumber(entry, "ZDR_dB");
const dbzOf = (entry: CheckValue) => inputNumber(entry, "reflectivity_dBZ");
const attenuationOf = (entry: CheckValue) => inputNumber(entry, "specific_attenuation_dB_per_km");

/** KDP in the middle of evenly spaced phases. */
function kdpOfPhases(phases: readonly number[], spacingKm: number): number {
  const slopes = new SlopeOfPhase(phases.length);
  slopes.load(Float64Array.from(phases));
  const half = (phases.length - 1) / 2;
  return slopes.kdpPerGate(half, half) / spacingKm;
}

/** The U.S. default, 300 and 1.4, whose inverse is printed as 0.0170 Z^0.7143. */
const INVERSE_OF_300_1_4 = readyRelation(zrRelation(300, 1.4, "test"), { dbz: 53 });

runReferenceSuite({
  topics: ["d-dualpol-rain"],
  notApplicable: [],
  adapters: [
    ["ryzhkov-kdp-*", (entry) => rateOfKdp(kdpOf(entry), RYZHKOV_2005_KDP)],
    ["cifelli-kdp-*", (entry) => rateOfKdp(kdpOf(entry), CIFELLI_2011_KDP)],
    ["cifelli-kdpzdr-*", (entry) => rateOfKdpZdr(kdpOf(entry), zdrOf(entry), lawsOf("S").kdpZdr)],
    ["cifelli-zzdr-*", (entry) => rateOfZZdr(dbzOf(entry), zdrOf(entry), CIFELLI_2011_Z_ZDR)],
    ["ryzhkov-zzdr-*", (entry) => rateOfZZdr(dbzOf(entry), zdrOf(entry), RYZHKOV_2005_Z_ZDR)],
    ["ryzhkov-kdpzdr-*", (entry) => rateOfKdpZdr(kdpOf(entry), zdrOf(entry), RYZHKOV_2005_KDP_ZDR)],
    ["bc-kdpzdr-*", (entry) => rateOfKdpZdr(kdpOf(entry), zdrOf(entry), lawsOf(bandOfId(entry)).kdpZdr)],
    ["bc-zzdr-*", (entry) => rateOfZZdr(dbzOf(entry), zdrOf(entry), lawsOf(bandOfId(entry)).zZdr)],
    ["bc-kdp-f-*", (entry) => rateOfKdp(kdpOf(entry), bringiKdpLaw(inputNumber(entry, "frequency_GHz")))],
    ["ra-S-10C-*", (entry) => rateOfAttenuation(attenuationOf(entry), RYZHKOV_2014_S_10C)],
    [
      /^ra-[SCX]-20C-/,
      (entry) => rateOfAttenuation(attenuationOf(entry), lawsOf(bandOfId(entry)).attenuation),
    ],
    ["zdr-lin", (entry) => ratioFromDecibels(zdrOf(entry))],
    [
      "kdp-from-phidp",
      (entry) => {
        const pathKm = inputNumber(entry, "path_km");
        const rise = inputNumber(entry, "phidp_rise_deg");
        return kdpOfPhases([0, rise / 2, rise], pathKm / 2);
      },
    ],
    [
      "kdp-lsq",
      (entry) => kdpOfPhases(inputNumbers(entry, "phidp_deg"), inputNumber(entry, "gate_spacing_km")),
    ],
  ],
});

describe("estimators", () => {
  // Printed with three digits: 0.0170 Z^0.7143 against (1/300)^(1/1.4) = 0.017005 and 1/1.4 = 0.714286.
  test.each([30, 40, 50])("R(Z) of 300/1.4 at %i dBZ is the printed 0.0170 Z^0.7143 to 0.1 %%", (dbz) => {
    const printed = 0.017 * 10 ** (0.07143 * dbz);
    expect(Math.abs(rateOfZ(dbz, INVERSE_OF_300_1_4) / printed - 1)).toBeLessThan(1e-3);
  });

  // 40.5 (KDP 2.8 / f)^0.85 by hand: at 2.8 GHz 40.5; at 5.6 GHz half the KDP, 40.5 / 2^0.85 = 22.469.
  test("R(KDP) is that of S band with KDP scaled by frequency", () => {
    expect(rateOfKdp(1, kdpLaw(2.8))).toBeCloseTo(40.5, 10);
    expect(rateOfKdp(2, kdpLaw(5.6))).toBeCloseTo(40.5, 10);
    expect(rateOfKdp(1, kdpLaw(5.6))).toBeCloseTo(22.469, 3);
  });

  // Rayleigh-Gans scattering of Marshall-Palmer spectra at 2.8 GHz, drops of axis ratio 1.03 - 0.062 D, from the
  // collection of published values: KDP 0.244, 0.692, 1.509, 3.260 deg/km at 11.64, 28.23, 54.64, 104.75 mm/h.
  test.each([
    [0.244, 11.64],
    [0.692, 28.23],
    [1.509, 54.64],
    [3.26, 104.75],
  ])("R(KDP) of S band at %d deg/km is %d mm/h to 8 %%, as scattering gives it", (kdp, rate) => {
    expect(Math.abs(rateOfKdp(kdp, kdpLaw(2.8)) / rate - 1)).toBeLessThan(0.08);
  });

  test("noise of KDP about 0 has no mean", () => {
    expect(rateOfKdp(0.1, kdpLaw(2.8)) + rateOfKdp(-0.1, kdpLaw(2.8))).toBe(0);
    expect(rateOfKdp(0, kdpLaw(2.8))).toBe(0);
    expect(rateOfKdp(Number.NaN, kdpLaw(2.8))).toBeNaN();
  });

  test("no coefficients stand for L and Ku band", () => {
    expect(bandLaws(wavelengthM(1.3e9))).toBeUndefined();
    expect(bandLaws(wavelengthM(13.6e9))).toBeUndefined();
  });
});

test("at S band R(Z, ZDR) lies midway between the two published laws, in the logarithm", () => {
  for (const [dbz, zdr] of [
    [30, 0.6],
    [40, 1.3],
    [50, 2.8],
  ] as const) {
    const of = (law: typeof MEAN_Z_ZDR) => rateOfZZdr(dbz, zdr, law);
    expect(
      of(bandLaws(0.107)!.zZdr) / Math.sqrt(of(CIFELLI_2011_Z_ZDR) * of(RYZHKOV_2005_Z_ZDR)),
    ).toBeCloseTo(1, 9);
  }
});
