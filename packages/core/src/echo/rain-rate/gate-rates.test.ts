import { describe, expect, test } from "vitest";
import { resolveCap } from "../../cap.ts";
import { gateRate } from "../../rate-table.ts";
import { findRelation, rainRateMmPerHour } from "../../relations.ts";
import { markBit } from "../polar-echo.ts";
import { DropNumberLearner } from "./drop-number.ts";
import { kdpLaw, rateOfKdp } from "./estimators.ts";
import { gateRateAccount, gateRates, RATE_METHODS, type RateMethod } from "./gate-rates.ts";
import { rainLimitDbz } from "./hail.ts";
import { type GateRateSettings, POLARIMETRIC_RATE_DEFAULTS, rateTables } from "./rate-tables.ts";
import { type TestGate, testEcho } from "./test-echo.ts";

const RELATION = findRelation("marshall-1955-200/1.6");
const PLAIN: GateRateSettings = { relation: RELATION, cap: { dbz: 53 }, minRateMmPerHour: 0 };
const POLARIMETRIC: GateRateSettings = { ...PLAIN, polarimetric: POLARIMETRIC_RATE_DEFAULTS };
/** R(KDP) as it stands, whatever ZDR says. */
const KDP_ALONE: GateRateSettings = {
  ...PLAIN,
  polarimetric: { ...POLARIMETRIC_RATE_DEFAULTS, kdpZdrPart: 0 },
};
/** Every estimator takes part. */
const ALL: GateRateSettings = {
  ...PLAIN,
  polarimetric: {
    dropNumber: true,
    dropSize: true,
    hail: true,
    kdpShare: 0.9,
    kdpZdrPart: 0.5,
    zZdrShare: 0.5,
    attenuationShare: 0.3,
  },
};
/** S band of 2.8 GHz, for which the law of R(KDP) is 40.5 KDP^0.85 as it stands. */
const S_BAND_M = 0.299792458 / 2.8;
/** Ten blocks of 1000 km2 at 38.25 dBZ, whose R(Z) is 8.96 mm/h, with a fifth less by ZDR. */
const DROP_SIZE = {
  rainByZZdr: new Float64Array(10).fill(7171),
  areaKm2: Float64Array.from({ length: 400 }, (_, at) => (at % 40 === 20 ? 1000 : 0)),
};

/** Every gate alike, 9 × 9 around the one that is looked at. */
function uniform(gate: TestGate) {
  return { echo: testEcho(9, 9, () => gate, S_BAND_M), middle: 40, wavelengthM: S_BAND_M };
}

function rateOf(gate: TestGate, settings: GateRateSettings, attenuationDbPerKm?: number) {
  const { echo, middle, wavelengthM } = uniform(gate);
  const attenuation =
    attenuationDbPerKm === undefined ? undefined : new Float32Array(81).fill(attenuationDbPerKm);
  const rates = gateRates(echo, undefined, settings, rateTables(settings, wavelengthM), attenuation);
  const method = RATE_METHODS[rates.method[middle]] as RateMethod;
  return { rate: rates.rateMmPerHour[middle], capped: rates.capped[middle], method, rates, echo };
}

describe("without polarimetric moments", () => {
  const values = [Number.NaN, Number.NEGATIVE_INFINITY];
  for (let dbz = -32; dbz < 96; dbz += 0.37) values.push(dbz);

  test.each([
    ["marshall-1955-200/1.6", { dbz: 53 }, 0.1, 0.1],
    ["fulton-1998-300/1.4", { mmPerHour: 103.8 }, 0, 0.053],
    ["sekhon-1970-1780/2.21", { mmPerHour: 80 }, 0.05, undefined],
  ] as const)(
    "%s gives every rate and cap of the plain conversion, to the bit",
    (name, cap, minRate, wave) => {
      const relation = findRelation(name);
      const echo = testEcho(1, values.length, (_, gate) => ({ dbz: values[gate] }), wave);
      const settings = { ...POLARIMETRIC, relation, cap, minRateMmPerHour: minRate };
      const rates = gateRates(echo, undefined, settings, rateTables(settings, wave));
      const plain = { relation, cap: resolveCap(cap, relation), minRateMmPerHour: minRate, offsetDb: 0 };
      const expected = Array.from(echo.dbz, (dbz) => gateRate(dbz, plain));
      expect(rates.rateMmPerHour).toEqual(Float32Array.from(expected, ({ rate }) => rate));
      expect(rates.capped).toEqual(Uint8Array.from(expected, ({ capped }) => capped));
      expect(rates.lacking).toEqual([...(wave === undefined ? ["wavelength"] : []), "KDP", "ZDR", "RHOHV"]);
    },
  );

  test("moments without a wavelength, or at Ku band, change nothing either, and it is said", () => {
    const gate = { dbz: 50, zdrDb: 0, rhohv: 0.9, kdpDegPerKm: 1 };
    for (const wavelengthM of [undefined, 0.022]) {
      const echo = testEcho(3, 3, () => gate, wavelengthM);
      const rates = gateRates(echo, undefined, POLARIMETRIC, rateTables(POLARIMETRIC, wavelengthM));
      expect(rates.rateMmPerHour[4]).toBe(Math.fround(rainRateMmPerHour(50, RELATION)));
      expect(rates.lacking).toEqual([
        wavelengthM === undefined ? "wavelength" : "coefficients for this wavelength",
      ]);
    }
  });

  test("under a relation for snow no law of rain has a say, and it is said", () => {
    const settings = { ...POLARIMETRIC, relation: findRelation("sekhon-1970-1780/2.21") };
    const { rate, rates } = rateOf({ dbz: 50, zdrDb: 0, rhohv: 0.9, kdpDegPerKm: 1 }, settings);
    expect(rate).toBe(Math.fround(rainRateMmPerHour(50, settings.relation)));
    expect(rates.lacking).toEqual(["a relation for rain"]);
  });

  test("moments that are not to be used change nothing", () => {
    const { rate, rates } = rateOf({ dbz: 50, zdrDb: 0, rhohv: 0.9, kdpDegPerKm: 1 }, PLAIN);
    expect(rate).toBe(Math.fround(rainRateMmPerHour(50, RELATION)));
    expect(rates.lacking).toEqual([]);
  });
});

describe("relation by type", () => {
  test("each type has its own relation and cap; none has that for all", () => {
    const settings = {
      ...PLAIN,
      convective: findRelation("fulton-1998-300/1.4"),
      stratiform: findRelation("us-east-practice-130/2.0"),
    };
    const echo = testEcho(1, 6, (_, gate) => ({ dbz: gate < 3 ? 40 : 60 }), S_BAND_M);
    const types = Uint8Array.of(0, 1, 2, 0, 1, 2);
    const rates = gateRates(echo, types, settings, rateTables(settings, 0.1));
    // R at 40 dBZ and at the cap of 53 dBZ, from the published tables of relations and caps.
    const expected = [11.53, 12.24, 8.771, 74.88, 103.83, 39.18];
    expected.forEach((rate, gate) => {
      expect(Math.abs(rates.rateMmPerHour[gate] / rate - 1)).toBeLessThan(6e-4);
    });
    expect([...rates.capped]).toEqual([0, 0, 0, 1, 1, 1]);
    expect(rates.counts.convectiveGates).toBe(2);
    expect(echo.marks[1] & markBit("convective")).not.toBe(0);
    expect(echo.marks[2] & markBit("convective")).toBe(0);
  });
});

describe("R(KDP) in heavy rain", () => {
  const rain = { zdrDb: 2.5, rhohv: 0.99 };

  test("is the rate from the cap upward, where the cap held R(Z)", () => {
    const { rate, capped, method } = rateOf({ ...rain, dbz: 54, kdpDegPerKm: 2 }, KDP_ALONE);
    expect(Math.abs(rate / (40.5 * 2 ** 0.85) - 1)).toBeLessThan(1e-6);
    expect([capped, method]).toEqual([0, "kdp"]);
  });

  test("is that of KDP and ZDR at S band, by the published law, where ZDR is measured", () => {
    // Cifelli et al. (2011): 90.8 KDP^0.93 10^(-0.169 ZDR).
    const { rate } = rateOf({ ...rain, dbz: 54, kdpDegPerKm: 2 }, POLARIMETRIC);
    expect(rate / (90.8 * 2 ** 0.93 * 10 ** (-0.169 * 2.5))).toBeCloseTo(1, 5);
  });

  test("has half a say midway between 45 and 53 dBZ, none at 45", () => {
    const settings = {
      ...PLAIN,
      polarimetric: { ...POLARIMETRIC_RATE_DEFAULTS, dropNumber: false, kdpZdrPart: 0, zZdrShare: 0 },
    };
    const byZ = rainRateMmPerHour(49, RELATION);
    const byKdp = rateOfKdp(1.5, kdpLaw(2.8));
    expect(rateOf({ ...rain, dbz: 49, kdpDegPerKm: 1.5 }, settings).rate).toBeCloseTo((byZ + byKdp) / 2, 4);
    expect(rateOf({ ...rain, dbz: 45, kdpDegPerKm: 1.5 }, settings).rate).toBeCloseTo(
      rainRateMmPerHour(45, RELATION),
      4,
    );
  });

  test("has none where KDP is no more than noise, or missing: the cap holds", () => {
    for (const kdpDegPerKm of [0.1, -0.4, Number.NaN]) {
      const { rate, capped, method } = rateOf({ ...rain, dbz: 54, kdpDegPerKm }, POLARIMETRIC);
      expect([Math.round(rate), capped, method]).toEqual([75, 1, "z"]);
    }
  });

  test("passes the cap up to 150 mm/h, no further", () => {
    expect(rateOf({ ...rain, dbz: 56, kdpDegPerKm: 9 }, POLARIMETRIC).rate).toBe(150);
  });

  test("one gate of clutter beside does not spoil it", () => {
    const echo = testEcho(
      9,
      9,
      (ray, gate) =>
        ray === 4 && gate === 5
          ? { dbz: 60, zdrDb: -6, rhohv: 0.5, kdpDegPerKm: 20 }
          : { ...rain, dbz: 54, kdpDegPerKm: 2 },
      S_BAND_M,
    );
    const rates = gateRates(echo, undefined, KDP_ALONE, rateTables(KDP_ALONE, S_BAND_M));
    expect(Math.abs(rates.rateMmPerHour[40] / (40.5 * 2 ** 0.85) - 1)).toBeLessThan(1e-6);
  });
});

describe("R(Z, ZDR) in moderate rain", () => {
  const rain = { dbz: 38, zdrDb: 1.2, rhohv: 0.99 };
  const byZ = rainRateMmPerHour(38, RELATION);
  /**
   * Mean of 6.7e-3 Z^0.927 10^(-0.343 ZDR) and 0.0142 Z^0.77 10^(-0.167 ZDR), by hand: 8.65 and 7.55 mm/h make 8.08.
   */
  const byZZdr = Math.sqrt(6.7e-3 * 0.0142) * 10 ** (0.8485 * 3.8 - 0.255 * 1.2);

  test("has all the say at S band, by the mean of the published laws", () => {
    expect(byZZdr).toBeCloseTo(8.08, 2);
    expect(rateOf(rain, POLARIMETRIC).rate).toBeCloseTo(byZZdr, 4);
  });

  test("has none at C band, unless it is set", () => {
    const rateAt = (settings: GateRateSettings) =>
      gateRates(
        testEcho(9, 9, () => rain, 0.053),
        undefined,
        settings,
        rateTables(settings, 0.053),
      ).rateMmPerHour[40];
    expect(rateAt(POLARIMETRIC)).toBeCloseTo(byZ, 4);
    const all = { ...PLAIN, polarimetric: { ...POLARIMETRIC_RATE_DEFAULTS, zZdrShare: 1 } };
    expect(rateAt(all)).toBeCloseTo(5.8e-3 * 10 ** (0.91 * 3.8 - 0.209 * 1.2), 4);
  });

  test.each([
    ["light rain", { ...rain, dbz: 28 }],
    ["rain at the cap", { ...rain, dbz: 53 }],
    ["a low correlation", { ...rain, rhohv: 0.97 }],
    ["no ZDR", { dbz: 38, rhohv: 0.99 }],
    ["rain whose drops look round", { ...rain, zdrDb: 0.3 }],
  ])("has none in %s", (_, gate) => {
    expect(rateOf(gate, POLARIMETRIC).rate).toBeCloseTo(rainRateMmPerHour(gate.dbz, RELATION), 4);
  });
});

describe("hail", () => {
  const hail = { dbz: 60, zdrDb: 0, rhohv: 0.92 };

  // Aydin et al. (1986): 27 for ZDR of 0 and less, 19 ZDR + 27 up to 1.74 dB, 60 above.
  test.each([
    [-1, 27],
    [0, 27],
    [1, 46],
    [1.74, 60],
    [3, 60],
  ])("rain of ZDR %d dB does not pass %d dBZ", (zdr, limit) => {
    expect(rainLimitDbz(zdr)).toBeCloseTo(limit, 0);
  });

  test("is marked, counted, and rains by KDP alone", () => {
    const { rate, capped, method, rates, echo } = rateOf({ ...hail, kdpDegPerKm: 0.5 }, POLARIMETRIC);
    expect(Math.abs(rate / (40.5 * 0.5 ** 0.85) - 1)).toBeLessThan(1e-6);
    expect([capped, method]).toEqual([0, "hail-kdp"]);
    expect(rates.counts.hailGates).toBe(81);
    expect(echo.marks[40] & markBit("hail")).not.toBe(0);
  });

  test("with a KDP of 0 or less rains nothing", () => {
    expect(rateOf({ ...hail, kdpDegPerKm: -0.2 }, POLARIMETRIC).rate).toBe(0);
  });

  // 9 × 9 gates at 10 km spacing of rays no wider than the reach: one gate of hail in rain of 40 dBZ.
  test("without KDP rains as the gates around it do, far below the cap", () => {
    const echo = testEcho(
      360,
      40,
      (ray, gate) => (ray === 100 && gate === 20 ? hail : { dbz: 40, zdrDb: 1.4, rhohv: 0.99 }),
      S_BAND_M,
    );
    const rates = gateRates(echo, undefined, POLARIMETRIC, rateTables(POLARIMETRIC, S_BAND_M));
    const at = 100 * 40 + 20;
    // 4 gates and 10 rays around it (3500 m at 20.5 km): 9 × 21 − 1 gates of 10.62 mm/h (R(Z, ZDR), by hand) and the cap of 74.88.
    expect(RATE_METHODS[rates.method[at]]).toBe("hail-neighbours");
    expect(rates.rateMmPerHour[at]).toBeGreaterThan(10.62);
    expect(rates.rateMmPerHour[at]).toBeLessThan(11.6);
  });

  test("over a sector it does not look across the gap", () => {
    const sector = testEcho(
      90,
      40,
      (ray, gate) =>
        ray < 40 ? { dbz: ray === 0 && gate === 20 ? 60 : 5, zdrDb: 0, rhohv: 0.92 } : { dbz: 40 },
      S_BAND_M,
    );
    for (let ray = 0; ray < 90; ray++) sector.azimuthDeg[ray] = ray;
    const rates = gateRates(sector, undefined, POLARIMETRIC, rateTables(POLARIMETRIC, S_BAND_M));
    expect(RATE_METHODS[rates.method[20]]).toBe("hail-neighbours");
    expect(Math.round(rates.rateMmPerHour[20])).toBe(75);
  });

  test("without KDP and without rain around it the cap holds", () => {
    const { rate, method } = rateOf(hail, POLARIMETRIC);
    expect([Math.round(rate), method]).toEqual([75, "hail-neighbours"]);
  });

  test.each([
    ["big drops", { dbz: 55, zdrDb: 3, rhohv: 0.98 }],
    ["rain of the usual shape", { dbz: 45, zdrDb: 1.2, rhohv: 0.985 }],
    ["many small drops", { dbz: 42, zdrDb: 0.6, rhohv: 0.99 }],
    ["moderate echo of low correlation", { dbz: 37, zdrDb: 0, rhohv: 0.9 }],
    ["strong echo without ZDR", { dbz: 60, rhohv: 0.9 }],
  ])("%s is none", (_, gate) => {
    expect(rateOf(gate, POLARIMETRIC).rates.counts.hailGates).toBe(0);
  });

  test("without RHOHV only a large HDR is hail", () => {
    expect(rateOf({ dbz: 60, zdrDb: 0 }, POLARIMETRIC).rates.counts.hailGates).toBe(81);
    expect(rateOf({ dbz: 40, zdrDb: 0.2 }, POLARIMETRIC).rates.counts.hailGates).toBe(0);
  });

  test("an offset of ZDR is taken off first", () => {
    const { echo } = uniform({ dbz: 45, zdrDb: 0.4, rhohv: 0.94 });
    // 45 − (19 · 1.0 + 27) < 0 with ZDR 0.6 dB too low; without the offset 45 − 34.6 > 8.
    const low = gateRates(
      echo,
      undefined,
      POLARIMETRIC,
      rateTables(POLARIMETRIC, S_BAND_M, { zdrOffsetDb: -0.6 }),
    );
    expect(low.counts.hailGates).toBe(0);
    const plain = gateRates(echo, undefined, POLARIMETRIC, rateTables(POLARIMETRIC, S_BAND_M));
    expect(plain.counts.hailGates).toBe(81);
  });
});

describe("melting snow and snow", () => {
  test.each(["melting", "snow"] as const)("%s keeps R(Z), is no hail, and is counted", (mark) => {
    const { echo, wavelengthM } = uniform({ dbz: 50, zdrDb: 0, rhohv: 0.9, kdpDegPerKm: 3 });
    echo.marks[40] |= markBit(mark);
    const rates = gateRates(echo, undefined, POLARIMETRIC, rateTables(POLARIMETRIC, wavelengthM));
    expect(rates.rateMmPerHour[40]).toBeCloseTo(rainRateMmPerHour(50, RELATION), 3);
    expect(rates.counts.frozenGates).toBe(1);
    expect(rates.counts.frozenRate).toBeCloseTo(rainRateMmPerHour(50, RELATION), 3);
    expect(rates.counts.hailGates).toBe(80);
  });
});

describe("number of drops", () => {
  /** 60 rays × 60 gates of 40 dBZ, whose R(Z) is 11.53 mm/h, with a KDP that says `times` as much. */
  function factorFor(times: number, rhohv = 0.99, dbz = 40): number {
    const kdpDegPerKm = ((11.53 * times) / 40.5) ** (1 / 0.85);
    const echo = testEcho(60, 60, () => ({ dbz, zdrDb: 0.8, rhohv, kdpDegPerKm }), S_BAND_M);
    return gateRates(echo, undefined, POLARIMETRIC, rateTables(POLARIMETRIC, S_BAND_M)).dropNumberFactor;
  }

  test.each([0.75, 1, 1.39])("a ratio of %d is the shape of drops: nothing is changed", (times) => {
    expect(factorFor(times)).toBeCloseTo(1, 6);
  });

  test.each([1.9, 2, 2.5])("a ratio of %d is their number: the sweep's rain follows KDP", (times) => {
    expect(Math.abs(factorFor(times) / times - 1)).toBeLessThan(0.02);
  });

  test.each([0, 0.4, 5])("a ratio of %d speaks of hail, ice or a broken KDP: nothing is changed", (times) => {
    expect(factorFor(times)).toBe(1);
  });

  test("echo of low correlation and echo too weak for KDP have no say", () => {
    expect(factorFor(3, 0.95)).toBe(1);
    expect(factorFor(3, 0.99, 30)).toBe(1);
  });

  test("a few gates do not outweigh the relation", () => {
    const echo = testEcho(
      360,
      30,
      (ray, gate) =>
        ray === 5 && gate > 20 && gate < 24
          ? { dbz: 40, rhohv: 0.99, zdrDb: 0.8, kdpDegPerKm: 2 }
          : { dbz: 20, rhohv: 0.99, zdrDb: 0.2, kdpDegPerKm: 0 },
      S_BAND_M,
    );
    const { dropNumberFactor } = gateRates(echo, undefined, POLARIMETRIC, rateTables(POLARIMETRIC, S_BAND_M));
    expect(dropNumberFactor).toBeCloseTo(1, 6);
  });

  test("what the run has learned speaks for a sweep with little heavy rain, and with no KDP", () => {
    const many = ((11.53 * 2.2) / 40.5) ** (1 / 0.85);
    const learner = new DropNumberLearner();
    learner.add(testEcho(60, 60, () => ({ dbz: 40, rhohv: 0.99, kdpDegPerKm: many }), S_BAND_M));
    const tables = rateTables(POLARIMETRIC, S_BAND_M, { zdrOffsetDb: 0, dropNumber: learner.finish() });
    expect(tables.dropNumberRatio).toBeGreaterThan(2.1);
    expect(tables.dropNumberRatio).toBeLessThan(2.3);
    for (const gate of [{ dbz: 25, rhohv: 0.99, kdpDegPerKm: 0 }, { dbz: 25 }]) {
      const rates = gateRates(
        testEcho(9, 9, () => gate, S_BAND_M),
        undefined,
        POLARIMETRIC,
        tables,
      );
      expect(rates.dropNumberFactor).toBeCloseTo(tables.dropNumberRatio ?? Number.NaN, 6);
    }
    // Heavy rain of the usual drops outweighs it: 3600 gates of 1 km, 60 km around, against 100 km2.
    const usual = testEcho(
      60,
      60,
      () => ({ dbz: 40, rhohv: 0.99, kdpDegPerKm: (11.53 / 40.5) ** (1 / 0.85) }),
      S_BAND_M,
    );
    expect(gateRates(usual, undefined, POLARIMETRIC, tables).dropNumberFactor).toBeCloseTo(1, 6);
  });

  test("a cap that was set as a rate holds the raised rate too", () => {
    const settings = { ...POLARIMETRIC, cap: { mmPerHour: 20 } };
    const echo = testEcho(60, 60, () => ({ dbz: 42, zdrDb: 0.8, rhohv: 0.99, kdpDegPerKm: 1.2 }), S_BAND_M);
    const rates = gateRates(echo, undefined, settings, rateTables(settings, S_BAND_M));
    expect(rates.dropNumberFactor).toBeGreaterThan(1.5);
    expect(rates.rateMmPerHour[1800]).toBe(20);
  });
});

describe("account of a gate", () => {
  const echoes = {
    rain: { dbz: 38, zdrDb: 1.2, rhohv: 0.99, kdpDegPerKm: 0.3 },
    heavy: { dbz: 50, zdrDb: 2.2, rhohv: 0.975, kdpDegPerKm: 1.4 },
    hail: { dbz: 55, zdrDb: 1.2, rhohv: 0.96, kdpDegPerKm: 0.8 },
    "hail without KDP": { dbz: 58, zdrDb: 0.2, rhohv: 0.96 },
    drizzle: { dbz: 4, zdrDb: 0, rhohv: 0.99, kdpDegPerKm: 0 },
  };
  const settings = { ...ALL, minRateMmPerHour: 0.1 };

  test.each(Object.entries(echoes))("of %s ends on the stored rate, and its steps lead there", (_, gate) => {
    const echo = testEcho(90, 30, (ray, at) => (ray === 40 && at === 20 ? gate : echoes.rain), S_BAND_M);
    const attenuation = new Float32Array(echo.dbz.length).fill(0.008);
    const tables = rateTables(settings, S_BAND_M, { zdrOffsetDb: 0.05, dropSize: DROP_SIZE });
    const { rateMmPerHour } = gateRates(echo, undefined, settings, tables, attenuation);
    const at = 40 * 30 + 20;
    const account = gateRateAccount(echo, undefined, settings, tables, at, attenuation);
    expect(Math.fround(account.rateMmPerHour)).toBe(rateMmPerHour[at]);
    const towards = (from: number, to: number, share: number) =>
      share > 0 ? from + share * (to - from) : from;
    let rate = Math.min(rainRateMmPerHour(echo.dbz[at], account.relation), account.capMmPerHour);
    rate *= account.dropSizeFactor * account.dropNumberFactor;
    rate = towards(rate, account.zZdrRate, account.zZdrShare);
    rate = towards(rate, account.attenuationRate, account.attenuationShare);
    rate = towards(rate, account.kdpRate, account.kdpShare);
    rate = towards(rate, account.underHail?.rateMmPerHour ?? Number.NaN, account.hailShare);
    const expected = rate < settings.minRateMmPerHour ? 0 : rate;
    expect(Math.abs(account.rateMmPerHour - expected)).toBeLessThan(1e-5 * (1 + expected));
  });

  test("a gate without echo has none", () => {
    const { echo } = uniform({ dbz: Number.NEGATIVE_INFINITY });
    expect(() => gateRateAccount(echo, undefined, ALL, rateTables(ALL, S_BAND_M), 40)).toThrow(RangeError);
  });
});

describe("settings", () => {
  test.each([{ kdpShare: 1.2 }, { zZdrShare: -0.1 }, { attenuationShare: Number.NaN }])(
    "%o is refused",
    (wrong) => {
      const settings = { ...PLAIN, polarimetric: { ...POLARIMETRIC_RATE_DEFAULTS, ...wrong } };
      expect(() => rateTables(settings, S_BAND_M)).toThrow(RangeError);
    },
  );

  test("a cut-off below 0 is refused", () => {
    expect(() => rateTables({ ...PLAIN, minRateMmPerHour: -1 }, S_BAND_M)).toThrow(RangeError);
  });
});

describe("no step anywhere", () => {
  type Key = "dbz" | "zdrDb" | "rhohv" | "kdpDegPerKm";
  const RANGES: Readonly<Record<Key, readonly [number, number]>> = {
    dbz: [15, 65],
    zdrDb: [-1, 3],
    rhohv: [0.65, 1],
    kdpDegPerKm: [-0.5, 4],
  };
  const STEPS = 200;

  /** Echo that varies from gate to gate, some of it hail, with a gate of one's own in its middle. */
  function fieldAround(middle: TestGate) {
    return testEcho(
      13,
      13,
      (ray, gate) =>
        ray === 6 && gate === 6
          ? middle
          : {
              dbz: 34 + 12 * Math.sin(ray) + 14 * Math.cos(0.7 * gate),
              zdrDb: 0.6 + 0.8 * Math.sin(0.3 * ray + gate),
              rhohv: 0.96 + 0.03 * Math.cos(ray + 0.4 * gate),
              kdpDegPerKm: 0.6 + 0.7 * Math.cos(0.9 * ray - gate),
            },
      S_BAND_M,
    );
  }

  const cases = (["dbz", "zdrDb", "rhohv", "kdpDegPerKm"] as const).flatMap((key) =>
    [
      { dbz: 36, zdrDb: 0.9, rhohv: 0.985, kdpDegPerKm: 0.4 },
      { dbz: 49, zdrDb: 1.6, rhohv: 0.97, kdpDegPerKm: 1.4 },
      { dbz: 58, zdrDb: 0.1, rhohv: 0.96, kdpDegPerKm: 0.9 },
      { dbz: 55, zdrDb: 0.3, rhohv: 0.93, kdpDegPerKm: Number.NaN },
    ].map((at) => [key, at] as const),
  );

  test.each(cases)("when %s moves through its range at %o", (key, at) => {
    const [from, to] = RANGES[key];
    const tables = rateTables(ALL, S_BAND_M);
    const echo = fieldAround(at);
    const middle = 6 * 13 + 6;
    const attenuation = new Float32Array(echo.dbz.length).fill(0.01);
    let before: Float32Array | undefined;
    let most = 0;
    for (let step = 0; step <= STEPS; step++) {
      (echo[key] as Float32Array)[middle] = from + ((to - from) * step) / STEPS;
      const { rateMmPerHour } = gateRates(echo, undefined, ALL, tables, attenuation);
      for (let gate = 0; gate < rateMmPerHour.length; gate++) {
        most = Math.max(most, Math.abs(rateMmPerHour[gate] - (before ?? rateMmPerHour)[gate]));
      }
      before = rateMmPerHour;
    }
    // The steepest way, from 0 to 150 mm/h over a seventh of a range, takes 5 mm/h a step.
    expect(most).toBeLessThan(6);
    expect(most).toBeGreaterThan(0);
  });
});
