import { expect, test } from "vitest";
import { resolveCap } from "./cap.ts";
import { InputError } from "./model/errors.ts";
import type { Moment } from "./model/radar.ts";
import { gateRate, momentRates, type RateSettings, rateConverter, rateTable } from "./rate-table.ts";
import { findRelation } from "./relations.ts";

const relation = findRelation("marshall-1955-200/1.6");
const settings: RateSettings = {
  relation,
  cap: resolveCap({ dbz: 53 }, relation),
  minRateMmPerHour: 0.1,
  offsetDb: 0,
};
const coding = { quantity: "DBZH", gain: 0.5, offset: -32, nodata: 255, undetect: 0 };

// Rates of Z = 200 R^1.6 by the check values `zr-marshall-palmer-*dBZ` and `cap-200-1.6-53`; 0.1 mm/h is
// 7.0103 dBZ by `zr-min-01mmh-mp`, so 7.0 is dry and 7.5 is not.
test.each([
  ["nodata", 255, Number.NaN, 0],
  ["undetect", 0, 0, 0],
  ["7 dBZ, below the cut-off", 78, 0, 0],
  ["7.5 dBZ, above it, by hand (10^0.75 / 200)^(1/1.6)", 79, (10 ** 0.75 / 200) ** 0.625, 0],
  ["20 dBZ", 104, 0.6484197773255, 0],
  ["40 dBZ", 144, 11.5307153908, 0],
  ["53 dBZ, at the cap", 170, 74.87834773718, 1],
  ["60 dBZ, over it", 184, 74.87834773718, 1],
])("table: %s", (_title, code, rate, capped) => {
  const table = rateTable(coding, new Uint8Array(0), settings, "scan.h5");
  expect(table.rate).toHaveLength(256);
  if (Number.isNaN(rate)) expect(table.rate[code]).toBeNaN();
  else expect(table.rate[code]).toBeCloseTo(rate, 5);
  expect(table.capped[code]).toBe(capped);
});

test("the calibration offset comes before relation and cap", () => {
  // +1 dB on 39 dBZ is 40 dBZ; +1 dB on 52.5 dBZ meets the cap of 53.
  const shifted = { ...settings, offsetDb: 1 };
  expect(gateRate(39, shifted).rate).toBeCloseTo(11.5307153908, 9);
  expect(gateRate(52.5, shifted)).toEqual({ rate: settings.cap.mmPerHour, capped: 1 });
  expect(gateRate(52.5, settings).capped).toBe(0);
  expect(gateRate(Number.NEGATIVE_INFINITY, shifted)).toEqual({ rate: 0, capped: 0 });
});

test("a rate of exactly the cut-off counts", () => {
  const { rate } = gateRate(20, settings);
  expect(gateRate(20, { ...settings, minRateMmPerHour: rate }).rate).toBe(rate);
  expect(gateRate(19.5, { ...settings, minRateMmPerHour: rate }).rate).toBe(0);
});

test("a cut-off of 0 lets the weakest echo count", () => {
  expect(gateRate(-31.5, { ...settings, minRateMmPerHour: 0 }).rate).toBeGreaterThan(0);
});

test("a cap set as a rate bites at that rate, for snow too", () => {
  const snow = findRelation("sekhon-1970-1780/2.21");
  const capped = { ...settings, relation: snow, cap: resolveCap({ mmPerHour: 10 }, snow) };
  expect(gateRate(70, capped)).toEqual({ rate: 10, capped: 1 });
  // Check value `zr-sekhon-srivastava-snow-20dBZ`, of melted drops: 13.5 dBZ as the radar shows it.
  expect(gateRate(13.5, capped).rate).toBeCloseTo(0.2717684853821, 9);
});

test("tables and value by value agree, for every type and every code", () => {
  const codes = Uint8Array.from({ length: 256 }, (_, code) => code);
  const expected = momentRates({ ...coding, stored: codes }, settings, "a");
  for (const Stored of [Uint16Array, Int16Array, Int32Array, Float32Array, Float64Array]) {
    const moment: Moment = { ...coding, stored: Stored.from(codes) };
    expect(momentRates(moment, settings, "a")).toEqual(expected);
    expect(rateConverter(settings)(moment, "a")).toEqual(expected);
  }
});

test("all 65,536 codes of uint16, value by value", () => {
  const fine = { quantity: "DBZH", gain: 0.01, offset: -100, nodata: 65535, undetect: 0 };
  const stored = Uint16Array.from({ length: 65536 }, (_, code) => code);
  const byTable = momentRates({ ...fine, stored }, settings, "a");
  const byValue = momentRates({ ...fine, stored: Float64Array.from(stored) }, settings, "a");
  expect(byTable).toEqual(byValue);
  // The cap catches 53 dBZ, code 15300, and all above it but nodata, which is the last code.
  expect(byTable.capped.reduce((sum, flag) => sum + flag, 0)).toBe(65535 - 15300);
});

test("a converter keeps tables of different codings apart", () => {
  const convert = rateConverter(settings);
  const stored = Uint8Array.from([144]);
  expect(convert({ ...coding, stored }, "a").rate[0]).toBeCloseTo(11.5307, 3);
  expect(convert({ ...coding, offset: -52, stored }, "a").rate[0]).toBeCloseTo(0.6484, 3);
  expect(convert({ ...coding, nodata: 144, stored }, "a").rate[0]).toBeNaN();
  expect(convert({ ...coding, undetect: 144, stored }, "a").rate[0]).toBe(0);
  expect(convert({ ...coding, stored: Uint16Array.from([144]) }, "a").rate[0]).toBeCloseTo(11.5307, 3);
  expect(convert({ ...coding, stored }, "a").rate[0]).toBeCloseTo(11.5307, 3);
});

test("gain 0 is refused in every path, with its place", () => {
  for (const stored of [new Uint8Array(1), new Float32Array(1)]) {
    const moment: Moment = { ...coding, gain: 0, stored };
    expect(() => momentRates(moment, settings, "scan.h5, /dataset1/data1")).toThrow(InputError);
    expect(() => rateConverter(settings)(moment, "scan.h5")).toThrow(/scan\.h5/);
  }
});

test("settings that are no numbers are a caller's mistake", () => {
  const moment: Moment = { ...coding, stored: new Float32Array(1) };
  for (const wrong of [
    { minRateMmPerHour: Number.NaN },
    { minRateMmPerHour: -1 },
    { offsetDb: Number.NaN },
  ]) {
    expect(() => momentRates(moment, { ...settings, ...wrong }, "a")).toThrow(RangeError);
    expect(() => rateTable(coding, new Uint8Array(0), { ...settings, ...wrong }, "a")).toThrow(RangeError);
  }
});
