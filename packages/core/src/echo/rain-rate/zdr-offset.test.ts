import { describe, expect, test } from "vitest";
import { markBit, screenBit } from "../polar-echo.ts";
import { testEcho } from "./test-echo.ts";
import { USUAL_ZDR, usualZdrDb, ZdrOffsetLearner } from "./zdr-offset.ts";

/** Light rain of 20 to 28 dBZ with its usual ZDR and an offset, stored in steps of 0.2 dB, noise of ± 0.3 dB. */
function lightRain(offsetDb: number, rhohv = 0.99) {
  return testEcho(
    90,
    60,
    (ray, gate) => {
      const dbz = 20 + 8 * (((ray * 60 + gate) * 0.618034) % 1);
      const noise = 0.6 * ((((ray * 60 + gate) * 0.414214) % 1) - 0.5);
      return { dbz, rhohv, zdrDb: 0.2 * Math.round((usualZdrDb(dbz) + offsetDb + noise) / 0.2) };
    },
    0.1,
  );
}

function learnedFrom(...echoes: readonly ReturnType<typeof lightRain>[]) {
  const learner = new ZdrOffsetLearner();
  for (const echo of echoes) learner.add(echo);
  return learner.finish();
}

describe("usual ZDR", () => {
  test.each(USUAL_ZDR.map(({ dbz, zdrDb }) => [dbz, zdrDb]))("at %d dBZ is %d dB", (dbz, zdr) => {
    expect(usualZdrDb(dbz)).toBeCloseTo(zdr, 12);
  });

  test("is a straight line between classes and beyond them", () => {
    expect(usualZdrDb(22)).toBeCloseTo(0.25, 12);
    expect(usualZdrDb(20)).toBeCloseTo(0.21, 12);
    expect(usualZdrDb(28)).toBeCloseTo(0.41, 12);
  });
});

describe("offset of ZDR", () => {
  test.each([-0.7, 0.6, 1.2])("of %d dB is found to 0.03 dB", (offsetDb) => {
    const learned = learnedFrom(lightRain(offsetDb));
    expect(Math.abs(learned.offsetDb - offsetDb)).toBeLessThan(0.03);
    expect(learned.gateCount).toBe(5400);
  });

  test.each([-0.4, 0, 0.4])(
    "of %d dB may be the weather's: it is told, and nothing is taken off",
    (offset) => {
      const learned = learnedFrom(lightRain(offset));
      expect(Math.abs(learned.differenceDb - offset)).toBeLessThan(0.03);
      expect(learned.offsetDb).toBe(0);
    },
  );

  test("is the same in whatever order sweeps are added", () => {
    const [a, b] = [lightRain(0.5), lightRain(0.9)];
    expect(learnedFrom(a, b)).toEqual(learnedFrom(b, a));
  });

  test("screened, frozen, badly correlated gates and those behind heavy rain have no say", () => {
    const screened = lightRain(1);
    screened.screenedBy.fill(screenBit("clear-air"));
    const melting = lightRain(1);
    melting.marks.fill(markBit("melting"));
    const behind = lightRain(1);
    behind.rainPhaseDeg = new Float32Array(behind.dbz.length).fill(40);
    expect(learnedFrom(screened, melting, behind, lightRain(1, 0.95)).gateCount).toBe(0);
  });

  test("a tenth of clutter with a wild ZDR moves it by less than 0.02 dB", () => {
    const echo = lightRain(0.5);
    for (let gate = 0; gate < echo.dbz.length; gate += 10) (echo.zdrDb as Float32Array)[gate] = 3.4;
    expect(Math.abs(learnedFrom(echo).offsetDb - learnedFrom(lightRain(0.5)).offsetDb)).toBeLessThan(0.02);
  });

  test("too few gates, or no ZDR, teach nothing", () => {
    const few = testEcho(1, 500, () => ({ dbz: 24, rhohv: 0.99, zdrDb: 2 }), 0.1);
    expect(learnedFrom(few)).toEqual({ offsetDb: 0, differenceDb: Number.NaN, gateCount: 500 });
    expect(learnedFrom(testEcho(3, 3, () => ({ dbz: 24 }), 0.1)).gateCount).toBe(0);
  });
});
