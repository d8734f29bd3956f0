import { expect, test } from "vitest";
import { InputError } from "./model/errors.ts";
import type { Moment } from "./model/radar.ts";
import { checkCoding, lookUp, momentValue, momentValues } from "./moment-values.ts";

// A usual ODIM coding: half-dB steps from -32 dBZ, 255 nodata, 0 undetect.
const coding = { quantity: "DBZH", gain: 0.5, offset: -32, nodata: 255, undetect: 0 };

test("physical = stored * gain + offset; nodata is unknown, undetect is below all", () => {
  expect(momentValue(130, coding)).toBe(33);
  expect(momentValue(255, coding)).toBeNaN();
  expect(momentValue(0, coding)).toBe(Number.NEGATIVE_INFINITY);
});

test("a code that is both is nodata, as that claims less", () => {
  expect(momentValue(0, { ...coding, nodata: 0 })).toBeNaN();
});

test("codes that the file does not define match nothing", () => {
  expect(momentValue(0, { quantity: "DBZH", gain: 0.5, offset: -32 })).toBe(-32);
});

test.each([Uint8Array, Uint16Array, Int16Array, Int32Array, Float32Array, Float64Array])(
  "%o gives the same values as the others",
  (Stored) => {
    const moment: Moment = { ...coding, stored: Stored.from([0, 1, 130, 254, 255]) };
    expect([...momentValues(moment, "a")]).toEqual([Number.NEGATIVE_INFINITY, -31.5, 33, 95, Number.NaN]);
  },
);

test("a special code that 32 bits cannot hold exactly still matches", () => {
  const stored = Float32Array.from([-9999.9, -8888.8, 20]);
  const moment: Moment = { quantity: "DBZH", gain: 1, offset: 0, nodata: -9999.9, undetect: -8888.8, stored };
  expect([...momentValues(moment, "a")]).toEqual([Number.NaN, Number.NEGATIVE_INFINITY, 20]);
});

test("NaN is nodata and an infinite number no measurement, whatever the file defines", () => {
  const stored = Float64Array.from([Number.NaN, Number.POSITIVE_INFINITY, Number.NEGATIVE_INFINITY]);
  expect([...momentValues({ quantity: "DBZH", gain: 1, offset: 0, stored }, "a")]).toEqual([
    Number.NaN,
    Number.NaN,
    Number.NEGATIVE_INFINITY,
  ]);
});

test.each([
  [0, -32],
  [Number.NaN, -32],
  [Number.POSITIVE_INFINITY, -32],
  [0.5, Number.NaN],
  [0.5, Number.NEGATIVE_INFINITY],
])("gain %d with offset %d is refused with its place", (gain, offset) => {
  const check = () => checkCoding({ ...coding, gain, offset }, "scan.h5, /dataset1/data1");
  expect(check).toThrow(InputError);
  expect(check).toThrow(/DBZH is stored with gain .* \(scan\.h5, \/dataset1\/data1\)/);
  const moment: Moment = { ...coding, gain, offset, stored: new Uint8Array(1) };
  expect(() => momentValues(moment, "scan.h5")).toThrow(InputError);
});

test.each([0, 1, 2, 3, 4, 5, 6, 7, 8, 9])("a look-up of %d codes fills just these", (length) => {
  const table = Float32Array.from({ length: 256 }, (_, code) => 2 * code);
  const codes = Uint8Array.from({ length }, (_, index) => 255 - index);
  const out = new Float32Array(length + 1).fill(-1);
  expect([...lookUp(codes, table, out)]).toEqual([...codes].map((code) => 2 * code).concat(-1));
  expect([...lookUp(codes, table)]).toEqual([...codes].map((code) => 2 * code));
});

test("a look-up refuses a table without all codes, and an output that is too short", () => {
  expect(() => lookUp(new Uint16Array(1), new Float32Array(256))).toThrow(RangeError);
  expect(() => lookUp(new Uint8Array(2), new Float32Array(256), new Float32Array(1))).toThrow(RangeError);
});
